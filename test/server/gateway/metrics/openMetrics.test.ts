import { describe, expect, it } from 'vitest';
import { createHistogram, family, openMetricsText } from '../../../../server/gateway/metrics/openMetrics.ts';
import { parseOpenMetrics } from '../openMetricsParser.ts';

/** The example of the specification's section "Overall Structure", with its timestamps and exemplars left out. */
const PRINTED = `# TYPE acme_http_router_request_seconds histogram
# UNIT acme_http_router_request_seconds seconds
# HELP acme_http_router_request_seconds Latency though all of ACME's HTTP request router.
acme_http_router_request_seconds_bucket{le="0.5"} 3.0
acme_http_router_request_seconds_bucket{le="+Inf"} 5
acme_http_router_request_seconds_sum 9036.32
acme_http_router_request_seconds_count 5
# TYPE go_goroutines gauge
# HELP go_goroutines Number of goroutines that currently exist.
go_goroutines 69
# TYPE process_cpu_seconds counter
# UNIT process_cpu_seconds seconds
# HELP process_cpu_seconds Total user and system CPU time spent in seconds.
process_cpu_seconds_total 4.20072246e+06
# EOF
`;

describe('the reader of the tests', () => {
  it('takes what the specification prints', () => {
    expect(parseOpenMetrics(PRINTED).map(({ name, samples }) => [name, samples.length])).toEqual([
      ['acme_http_router_request_seconds', 4],
      ['go_goroutines', 1],
      ['process_cpu_seconds', 1],
    ]);
  });

  it.each([
    ['no end', PRINTED.replace('# EOF\n', '')],
    ['something after the end', `${PRINTED}go_goroutines 1\n`],
    ['a counter without _total', PRINTED.replace('process_cpu_seconds_total', 'process_cpu_seconds')],
    [
      'a unit that the name lacks',
      PRINTED.replace('UNIT process_cpu_seconds seconds', 'UNIT process_cpu_seconds bytes'),
    ],
    ['a family again', PRINTED.replace('# EOF', '# TYPE go_goroutines gauge\ngo_goroutines 1\n# EOF')],
    ['a sample twice', PRINTED.replace('go_goroutines 69', 'go_goroutines 69\ngo_goroutines 69')],
    ['a bucket that falls', PRINTED.replace('le="0.5"} 3.0', 'le="0.5"} 7')],
    ['a quote that is not escaped', PRINTED.replace('go_goroutines 69', 'go_goroutines{a="b"c"} 69')],
    [
      'a type after a sample',
      PRINTED.replace('go_goroutines 69', 'go_goroutines 69\n# UNIT go_goroutines goroutines'),
    ],
    ['an empty line', PRINTED.replace('# EOF', '\n# EOF')],
  ])('refuses %s', (_what, text) => {
    expect(text).not.toBe(PRINTED);
    expect(() => parseOpenMetrics(text)).toThrow();
  });
});

describe('metrics as text', () => {
  it('come back as they were, whatever a label holds', () => {
    const strange = 'a "b" \\ c\nd é 漢';
    const [read] = parseOpenMetrics(
      openMetricsText([family('gauge', 'x', 'a "b" \\\n', [[{ of: strange }, -1.5e-9]])]),
    );
    expect(read).toMatchObject({
      type: 'gauge',
      samples: [{ name: 'x', labels: { of: strange }, value: -1.5e-9 }],
    });
  });

  it('count in buckets what a slow count finds', () => {
    const bounds = [0.1, 1, 10];
    const values = [0.05, 0.1, 0.5, 1, 3, 30, 300];
    const histogram = createHistogram(bounds);
    for (const value of values) histogram.add(value);
    const [read] = parseOpenMetrics(openMetricsText([histogram.family('took_seconds', 'x', 'seconds')]));
    const of = (suffix: string) => read!.samples.filter(({ name }) => name === `took_seconds${suffix}`);
    expect(of('_bucket').map(({ value }) => value)).toEqual(
      [...bounds, Infinity].map((bound) => values.filter((value) => value <= bound).length),
    );
    expect(of('_bucket').map(({ labels }) => labels.le)).toEqual(['0.1', '1.0', '10.0', '+Inf']);
    expect(of('_sum')[0]!.value).toBeCloseTo(334.65, 9);
  });
});
