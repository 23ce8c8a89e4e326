/**
 * Metrics in the text format of OpenMetrics 1.0.0 (the OpenMetrics specification, "Text Format"): families in turn, each
 * with its TYPE, UNIT and HELP before its samples, `# EOF` at the end.
 */
export interface Family {
  /** without `_total`; ends in the unit where there is one */
  name: string;
  type: 'counter' | 'gauge' | 'info' | 'stateset' | 'histogram';
  /** '' where the numbers count something */
  unit: string;
  help: string;
  samples: Sample[];
}

export interface Sample {
  /** `_total`, `_bucket`, `_info` …; '' for gauges and state sets */
  suffix: string;
  labels: Readonly<Record<string, string>>;
  value: number;
}

export const OPEN_METRICS_TYPE = 'application/openmetrics-text; version=1.0.0; charset=utf-8';

const escaped = (text: string): string =>
  text.replaceAll('\\', '\\\\').replaceAll('\n', '\\n').replaceAll('"', '\\"');

function numberText(value: number): string {
  if (Number.isNaN(value)) return 'NaN';
  if (!Number.isFinite(value)) return value > 0 ? '+Inf' : '-Inf';
  return String(value);
}

function sampleText(name: string, { suffix, labels, value }: Sample): string {
  const pairs = Object.entries(labels).map(([key, text]) => `${key}="${escaped(text)}"`);
  return `${name}${suffix}${pairs.length === 0 ? '' : `{${pairs.join(',')}}`} ${numberText(value)}\n`;
}

/** The whole answer. */
export function openMetricsText(families: readonly Family[]): string {
  const parts = families.map(
    ({ name, type, unit, help, samples }) =>
      `# TYPE ${name} ${type}\n` +
      (unit === '' ? '' : `# UNIT ${name} ${unit}\n`) +
      `# HELP ${name} ${escaped(help)}\n` +
      samples.map((sample) => sampleText(name, sample)).join(''),
  );
  return `${parts.join('')}# EOF\n`;
}

/** A family of one sample for each set of labels. */
export function family(
  type: 'counter' | 'gauge',
  name: string,
  help: string,
  values: Iterable<readonly [Readonly<Record<string, string>>, number]>,
  unit = '',
): Family {
  const suffix = type === 'counter' ? '_total' : '';
  const samples = [...values].map(([labels, value]) => ({ suffix, labels, value }));
  return { name, type, unit, help, samples };
}

/** How long things took, in buckets. */
export interface Histogram {
  add(value: number): void;
  family(name: string, help: string, unit: string): Family;
}

/** @param bounds upper ends of the buckets, ascending, without infinity */
export function createHistogram(bounds: readonly number[]): Histogram {
  const counts = new Array<number>(bounds.length + 1).fill(0);
  let sum = 0;
  return {
    add(value) {
      const place = bounds.findIndex((bound) => value <= bound);
      counts[place === -1 ? bounds.length : place]!++;
      // a sum goes up only, as a counter does
      sum += Math.max(0, value);
    },
    family(name, help, unit) {
      let below = 0;
      const samples: Sample[] = counts.map((count, i) => {
        below += count;
        // bounds are written with their point: "1.0", as the specification asks of canonical numbers
        const le = i === bounds.length ? '+Inf' : canonical(bounds[i]!);
        return { suffix: '_bucket', labels: { le }, value: below };
      });
      samples.push(
        { suffix: '_count', labels: {}, value: below },
        { suffix: '_sum', labels: {}, value: sum },
      );
      return { name, type: 'histogram', unit, help, samples };
    },
  };
}

const canonical = (bound: number): string => (Number.isInteger(bound) ? bound.toFixed(1) : String(bound));
