/**
 * A strict reader of the OpenMetrics 1.0.0 text format: the ABNF of the specification (
 * "OpenMetrics, a cloud-native, highly scalable metrics protocol", draft-richih-opsawg-openmetrics-00, section
 * "ABNF" and "Overall Structure") with the rules of its prose:
 *
 *   exposition = metricset HASH SP eof [ LF ]
 *   metricfamily = *metric-descriptor *metric
 *   metric-descriptor = HASH SP type SP metricname SP metric-type LF
 *   metric-descriptor =/ HASH SP help SP metricname SP escaped-string LF
 *   metric-descriptor =/ HASH SP unit SP metricname SP *metricname-char LF
 *   sample = metricname [labels] SP number [SP timestamp] [exemplar] LF
 *   labels = "{" [label *(COMMA label)] "}"       label = label-name EQ DQUOTE escaped-string DQUOTE
 *   metricname = metricname-initial-char 0*metricname-char    ( ALPHA / "_" / ":" , and DIGIT after the first )
 *   label-name = label-name-initial-char *label-name-char     ( ALPHA / "_" , and DIGIT after the first )
 *   escaped-string = *escaped-char ; "\n", "\"" and "\\" are the escapes
 *   number = realnumber / [SIGN] ("inf" / "infinity") / "nan"
 *
 * The prose: descriptors come before samples, each once; families are not interleaved and not repeated; counters are
 * `_total` and not negative; a unit is the name's last part; info is 1; a state set's label is its name; buckets are
 * cumulative with `+Inf` equal to `_count`; `# EOF` is last; lines end with LF alone.
 */
export interface ParsedFamily {
  name: string;
  type: string;
  unit: string;
  help: string;
  samples: { name: string; labels: Record<string, string>; value: number }[];
}

const NAME = '[a-zA-Z_:][a-zA-Z0-9_:]*';
const ESCAPED = String.raw`(?:[^\\"\n]|\\n|\\"|\\\\)*`;
const LABEL = `[a-zA-Z_][a-zA-Z0-9_]*="${ESCAPED}"`;
const NUMBER = String.raw`[+-]?(?:\d+(?:\.\d*)?(?:[eE][+-]?\d+)?|\.\d+(?:[eE][+-]?\d+)?|[iI][nN][fF](?:[iI][nN][iI][tT][yY])?)|[nN][aA][nN]`;
const DESCRIPTOR = new RegExp(`^# (TYPE|UNIT|HELP) (${NAME}) (.*)$`);
const SAMPLE = new RegExp(`^(${NAME})(?:\\{((?:${LABEL})(?:,${LABEL})*)?\\})? (${NUMBER})$`);
const TYPES = ['counter', 'gauge', 'histogram', 'gaugehistogram', 'stateset', 'info', 'summary', 'unknown'];
const SUFFIXES: Record<string, string[]> = {
  counter: ['_total', '_created'],
  gauge: [''],
  stateset: [''],
  info: ['_info'],
  histogram: ['_bucket', '_count', '_sum', '_created'],
};

function labelsOf(text: string | undefined): Record<string, string> {
  const labels: Record<string, string> = {};
  for (const [, key, value] of (text ?? '').matchAll(
    new RegExp(`([a-zA-Z_][a-zA-Z0-9_]*)="(${ESCAPED})"`, 'g'),
  )) {
    if (Object.hasOwn(labels, key!)) throw new Error(`label ${key} twice`);
    labels[key!] = value!.replace(/\\(.)/g, (_, c: string) => (c === 'n' ? '\n' : c));
  }
  return labels;
}

const numberOf = (text: string): number =>
  /inf/i.test(text) ? (text.startsWith('-') ? -Infinity : Infinity) : Number(text);

/** The families of an exposition. @throws Error naming the line that is not allowed */
export function parseOpenMetrics(text: string): ParsedFamily[] {
  if (!/# EOF\n?$/.test(text)) throw new Error('it does not end with # EOF');
  if (text.includes('\r')) throw new Error('a line ends with CR');
  const lines = text.replace(/\n$/, '').split('\n');
  if (lines.pop() !== '# EOF') throw new Error('# EOF is not a line of its own');
  const families: ParsedFamily[] = [];
  let seen = new Set<string>();
  for (const line of lines) {
    const open = families.at(-1);
    const descriptor = DESCRIPTOR.exec(line);
    if (descriptor) {
      const [, kind, name, rest] = descriptor as unknown as [string, string, string, string];
      if (open?.name !== name) {
        if (families.some((family) => family.name === name)) throw new Error(`${name} comes again: ${line}`);
        families.push({ name, type: 'unknown', unit: '', help: '', samples: [] });
        seen = new Set();
      } else if (open.samples.length > 0) throw new Error(`a descriptor after samples: ${line}`);
      if (seen.has(kind)) throw new Error(`${kind} twice: ${line}`);
      seen.add(kind);
      describe(families.at(-1)!, kind, rest, line);
      continue;
    }
    const sample = SAMPLE.exec(line);
    if (!sample) throw new Error(`neither descriptor nor sample: ${line}`);
    const [, name, labels, value] = sample as unknown as [string, string, string | undefined, string];
    const fits = open && (SUFFIXES[open.type] ?? ['']).some((suffix) => name === open.name + suffix);
    if (!fits) throw new Error(`a sample of no open family: ${line}`);
    open.samples.push({ name, labels: labelsOf(labels), value: numberOf(value) });
  }
  for (const family of families) judge(family);
  return families;
}

function describe(family: ParsedFamily, kind: string, rest: string, line: string): void {
  if (kind === 'TYPE') {
    if (!TYPES.includes(rest)) throw new Error(`no such type: ${line}`);
    family.type = rest;
  } else if (kind === 'UNIT') {
    if (!family.name.endsWith(`_${rest}`)) throw new Error(`the unit does not end the name: ${line}`);
    family.unit = rest;
  } else {
    if (!new RegExp(`^${ESCAPED}$`).test(rest)) throw new Error(`help is not escaped: ${line}`);
    family.help = rest;
  }
}

function judge({ name, type, unit, samples }: ParsedFamily): void {
  const fail = (what: string) => {
    throw new Error(`${name}: ${what}`);
  };
  const keys = samples.map((sample) => sample.name + JSON.stringify(Object.entries(sample.labels).sort()));
  if (new Set(keys).size !== keys.length) fail('a sample twice');
  if (type === 'counter') {
    if (name.endsWith('_total')) fail('the family of a counter is named without _total');
    if (samples.some(({ value }) => !(value >= 0))) fail('a counter below zero');
  }
  if ((type === 'info' || type === 'stateset') && unit !== '') fail('a unit where there is none');
  if (type === 'info' && samples.some(({ value }) => value !== 1)) fail('an info that is not 1');
  if (type === 'stateset')
    for (const { labels, value } of samples) {
      if (labels[name] === undefined) fail('a state without its label');
      if (value !== 0 && value !== 1) fail('a state neither 0 nor 1');
    }
  if (type === 'histogram') judgeBuckets(name, samples, fail);
}

function judgeBuckets(name: string, samples: ParsedFamily['samples'], fail: (what: string) => void): void {
  const buckets = samples.filter((sample) => sample.name === `${name}_bucket`);
  const bounds = buckets.map(({ labels }) => numberOf(labels.le ?? 'nan'));
  if (bounds.at(-1) !== Infinity) fail('no +Inf bucket at the end');
  if (bounds.some((bound, i) => i > 0 && !(bound > bounds[i - 1]!))) fail('bounds not ascending');
  if (buckets.some(({ value }, i) => i > 0 && value < buckets[i - 1]!.value)) fail('buckets not cumulative');
  const count = samples.find((sample) => sample.name === `${name}_count`);
  if (count?.value !== buckets.at(-1)?.value) fail('_count is not the +Inf bucket');
  if (!samples.some((sample) => sample.name === `${name}_sum`)) fail('no _sum');
}
