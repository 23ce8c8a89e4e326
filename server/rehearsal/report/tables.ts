import type { RehearsalResult } from '../../../shared-types/rehearsal.ts';
import type { Interval } from '../../../shared-types/score.ts';
import { falseRateWords, rateUnitOf } from '../words.ts';
import {
  figure,
  type Html,
  html,
  hundredthWords,
  percentWords,
  rateWords,
  shortWords,
  spanWords,
  timeWords,
} from './html.ts';

const count = (value: number): Html => figure(value, String);

function intervalRow(name: string, { value, low, high }: Interval, words: (value: number) => string): Html {
  return html`<tr><th>${name}</th><td class="n">${figure(value, words)}</td><td>${
    low === null || high === null
      ? html`<span class="none">–</span>`
      : html`${figure(low, words)} to ${figure(high, words)}`
  }</td></tr>`;
}

/** The score of the judged part: fractions and rates with their 95 % intervals, then what was counted. */
export function scoreTable({ score }: RehearsalResult): Html {
  const { switches, warnings, lead } = score;
  const unit = rateUnitOf(score.watchedSeconds);
  const counted = (counts: Record<string, number>) =>
    Object.entries(counts)
      .filter(([name, value]) => name !== 'total' && value > 0)
      .map(([name, value], i) => html`${i === 0 ? '' : ', '}${count(value)} ${name}`);
  return html`<table class="score"><thead><tr><th></th><th class="n">judged</th><th>95 % interval</th></tr></thead><tbody>
${intervalRow('switches warned', score.detection, percentWords)}
${intervalRow('warnings that came true', score.cameTrue, percentWords)}
${intervalRow('false alarm ratio', score.falseRatio, percentWords)}
${intervalRow(`false warnings ${unit.words}`, score.falsePerHour, rateWords(unit))}
<tr><th>lead: median</th><td class="n">${figure(lead.median, spanWords)}</td><td>10 % to 90 %: ${figure(lead.p10, spanWords)} to ${figure(lead.p90, spanWords)}; by chance: ${figure(lead.random, spanWords)}</td></tr>
<tr><th>skill</th><td class="n">${figure(score.skill, hundredthWords)}</td><td>share warned less ${figure(score.tau, percentWords)} of the time in spans; ${figure(score.skillShare, percentWords)} of a perfect warner's; p\u00a0${figure(score.pValue, shortWords)}</td></tr>
<tr><th>switches</th><td class="n">${count(switches.total)}</td><td>${counted(switches)}</td></tr>
<tr><th>warnings</th><td class="n">${count(warnings.total)}</td><td>${counted(warnings)}</td></tr>
<tr><th>watched</th><td class="n">${figure(score.watchedSeconds, spanWords)}</td><td>with a full window</td></tr>
</tbody></table>`;
}

/** The variables and the baselines, each tuned on the tuning part with the same ceiling and judged on the rest. */
export function contenderTable({ contenders, settings }: RehearsalResult): Html {
  const chosen = settings.variable === 'forcing' ? 'forcing' : `level ${settings.direction}`;
  const rows = contenders.map(
    ({ name, kind, settings: words, skill, detection, cameTrue }) =>
      html`<tr class="${name === chosen ? 'chosenRow' : kind}"><th>${name}</th><td>${kind}</td><td class="n">${figure(skill, hundredthWords)}</td><td class="n">${figure(detection, percentWords)}</td><td class="n">${figure(cameTrue, percentWords)}</td><td>${words}</td></tr>`,
  );
  return html`<table><thead><tr><th>warns by</th><th></th><th class="n">skill</th><th class="n">warned</th><th class="n">came true</th><th>set to</th></tr></thead><tbody>${rows}</tbody></table>`;
}

/** What was asked and what was chosen. */
export function settingsTable({ request, settings, score, tried, weak }: RehearsalResult): Html {
  const { ceiling } = request;
  const ceilings = [
    ceiling.falsePerHour === null
      ? null
      : `at most ${falseRateWords(ceiling.falsePerHour, score.watchedSeconds)}`,
    ceiling.cameTrue === null ? null : `at least ${percentWords(ceiling.cameTrue)} coming true`,
  ].filter((words) => words !== null);
  const side = settings.direction === 'falling' ? 'below' : 'above';
  const rows: [string, Html | string][] = [
    ['channels', request.channels.join(', ')],
    [
      'a switch is',
      `${request.regime}${request.regimeChannel === null ? '' : ` of ${request.regimeChannel}`}`,
    ],
    [
      'least lead, horizon',
      html`${figure(settings.leastLead, spanWords)}, ${figure(settings.horizon, spanWords)}`,
    ],
    ['acceptable', ceilings.join(', ') || 'no ceiling was given'],
    ['delay until it reaches somebody', html`${figure(request.delay, spanWords)}`],
    [
      'tuning part',
      html`${figure(request.tunePart, percentWords)} of the time, or of four or more recordings`,
    ],
    ['watched for', html`${settings.variable} ${side} ${figure(settings.threshold, shortWords)}`],
    ['re-arm', html`${figure(settings.rearm, shortWords)}`],
    [
      'on-delay, hold-off',
      html`${figure(settings.onDelay, spanWords)}, ${figure(settings.holdOff, spanWords)}`,
    ],
    [
      'window',
      html`${figure(settings.window, spanWords)} (${count(settings.delays)} delays of ${figure(settings.interval, spanWords)})`,
    ],
    ['rank', count(settings.rank)],
    [
      'settings tried',
      html`${count(tried)}${weak ? '; nothing kept within what is acceptable: this is the plain maximum' : ''}`,
    ],
  ];
  return html`<table><tbody>${rows.map(([name, words]) => html`<tr><th>${name}</th><td>${words}</td></tr>`)}</tbody></table>`;
}

/** Left-out stretches listed of each recording; the rest is counted. */
const MOST_STRETCHES = 12;

/** Where the figures come from: recordings with their SHA-256, what was left out, program, seed. */
export function provenanceTable(result: RehearsalResult): Html {
  const { recordings, leftOut, program, at, request, seconds: took, fittedOnJudged } = result;
  const rows = recordings.map(({ name, from, to, judgedFrom, samples, sha256 }, i) => {
    const words = (time: number) => timeWords(time, from);
    const out = leftOut.filter(({ recording }) => recording === i);
    const listed = out
      .slice(0, MOST_STRETCHES)
      .map((one) => `${words(one.from)} to ${words(one.to)} (${one.why})`)
      .join('; ');
    const more = out.length > MOST_STRETCHES ? `; and ${out.length - MOST_STRETCHES} more` : '';
    return html`<tr><th>${name}</th><td>${words(from)} to ${words(to)}, ${count(samples)} samples, judged from ${words(judgedFrom)}<br/><span class="hash">SHA-256 ${sha256}</span>${out.length > 0 ? html`<br/>left out: ${listed}${more}` : null}</td></tr>`;
  });
  return html`<table><tbody>${rows}
<tr><th>made by</th><td>${program}, ${at}, seed ${count(request.seed)}, in ${figure(took, spanWords)}</td></tr>
${fittedOnJudged ? html`<tr><th>fitted on what is judged</th><td>The model was fitted on data that this rehearsal judges, so the score says nothing about new data.</td></tr>` : null}
</tbody></table>`;
}
