import type { Contender, RehearsalResult } from '../../../shared-types/rehearsal.ts';
import { inUnit, rateUnitOf, spanUnitOf } from '../words.ts';
import { type Area, type Axis, axisBelow, axisLeft, createAxis } from './axis.ts';
import { type Html, html, percentWords, shortWords, spanWords } from './html.ts';

const WIDTH = 380;
const HEIGHT = 270;
const AREA: Area = { left: 46, right: 366, top: 30, bottom: 226 };
/** Bars of the histogram over the horizon. */
const BARS = 20;

/** What of a contender the curve shows: its line's class and its words in the legend. */
interface Line {
  contender: Contender;
  style: string;
  words: string;
}

/** False warnings in a fitting unit against the share warned: each variable a line, the baselines thin, the chosen point ringed. */
export function tradeOff(result: RehearsalResult): Html {
  const { score, request } = result;
  const lines = linesOf(result);
  const most = reachOf(result, lines);
  const unit = rateUnitOf(score.watchedSeconds);
  const axis = createAxis(0, inUnit(most, unit), AREA.left, AREA.right);
  const x = { ...axis, at: (perHour: number) => axis.at(inUnit(perHour, unit)) };
  const y = createAxis(0, 1, AREA.bottom, AREA.top);
  const drawn = lines.map(
    ({ contender, style }) => html`<path class="line ${style}" d="${pathOf(contender, x, y)}"/>`,
  );
  const { falsePerHour: ceiling } = request.ceiling;
  const limit =
    ceiling === null || ceiling > most
      ? null
      : html`<path class="limit" d="M${x.at(ceiling).toFixed(1)} ${AREA.top}V${AREA.bottom}"/><text x="${(x.at(ceiling) + 4).toFixed(1)}" y="${AREA.top - 3}">acceptable</text>`;
  const chosen =
    score.falsePerHour.value === null || score.detection.value === null
      ? null
      : html`<circle class="chosen" cx="${x.at(score.falsePerHour.value).toFixed(1)}" cy="${y.at(score.detection.value).toFixed(1)}" r="5"/>`;
  return drawing(
    'Trade-off: switches warned against false warnings',
    html`${axisLeft(y, AREA, 'share warned', percentWords)}${axisBelow(axis, AREA, `false warnings ${unit.words}`)}${limit}<clipPath id="plot"><rect x="${AREA.left}" y="${AREA.top}" width="${AREA.right - AREA.left}" height="${AREA.bottom - AREA.top}"/></clipPath><g clip-path="url(#plot)">${drawn}</g>${chosen}`,
    html`${legend(lines)}<p class="note">Each line: the most that any threshold warned of with no more false warnings; the ring is what was chosen.</p>`,
  );
}

function linesOf({ contenders, settings }: RehearsalResult): Line[] {
  const drawable = contenders.filter(({ curve }) => curve.length > 0);
  const skillOf = ({ skill }: Contender) => skill ?? Number.NEGATIVE_INFINITY;
  const isChosen = ({ name }: Contender) =>
    settings.variable === 'forcing' ? name === 'forcing' : name === `level ${settings.direction}`;
  const best = drawable
    .filter((one) => one.kind === 'baseline' && !isChosen(one))
    .reduce<Contender | null>((found, one) => (found && skillOf(found) >= skillOf(one) ? found : one), null);
  let seconds = 0;
  const styled = drawable.map((contender): Line => {
    if (isChosen(contender)) return { contender, style: 'first', words: `${contender.name}, chosen` };
    if (contender.kind === 'variable')
      return { contender, style: seconds++ === 0 ? 'second' : 'third', words: contender.name };
    if (contender === best)
      return { contender, style: 'best', words: `${contender.name}, the best baseline` };
    return { contender, style: 'thin', words: 'other baselines' };
  });
  const order = ['thin', 'third', 'second', 'best', 'first'];
  return styled.sort((a, b) => order.indexOf(a.style) - order.indexOf(b.style));
}

/** How far the horizontal axis goes: well beyond the chosen point and the ceiling, but not to where everything warns. */
function reachOf({ score, request }: RehearsalResult, lines: readonly Line[]): number {
  const widest = Math.max(
    0,
    ...lines.flatMap(({ contender }) => contender.curve.map((point) => point.falsePerHour)),
  );
  const wanted = Math.max(
    3 * (score.falsePerHour.value ?? 0),
    2 * (request.ceiling.falsePerHour ?? 0),
    0.1 * widest,
  );
  return Math.min(widest, wanted) || 1;
}

/** Steps: the most that any threshold warned of with no more false warnings than that. */
function pathOf({ curve }: Contender, x: Pick<Axis, 'at'>, y: Axis): string {
  const points = [...curve].sort((a, b) => a.falsePerHour - b.falsePerHour || b.detection - a.detection);
  let path = '';
  let most = Number.NEGATIVE_INFINITY;
  for (const { falsePerHour, detection } of points) {
    if (detection <= most) continue;
    most = detection;
    const [right, up] = [x.at(falsePerHour).toFixed(1), y.at(detection).toFixed(1)];
    path += path === '' ? `M${right} ${up}` : `H${right}V${up}`;
  }
  return `${path}H${AREA.right}`;
}

function legend(lines: readonly Line[]): Html {
  const shown = new Map([...lines].reverse().map(({ style, words }) => [words, style]));
  const entries = [...shown].map(
    ([words, style]) =>
      html`<li><svg viewBox="0 0 30 10" width="30" height="10" aria-hidden="true"><path class="line ${style}" d="M1 5H29"/></svg>${words}</li>`,
  );
  return html`<ul class="legend">${entries}</ul>`;
}

/** How long before the judged, warned switches the warning came; the least lead and the median marked. */
export function leadHistogram(result: RehearsalResult): Html {
  const { settings, score, request, table, chosenRow } = result;
  const leads = Array.from(table.rows[chosenRow]!.leads);
  const counts = new Array<number>(BARS).fill(0);
  for (const lead of leads)
    counts[Math.max(0, Math.min(BARS - 1, Math.floor((lead / settings.horizon) * BARS)))]! += 1;
  const unit = spanUnitOf(settings.horizon);
  const axis = createAxis(0, settings.horizon / unit.seconds, AREA.left, AREA.right);
  const x = { at: (seconds: number) => axis.at(seconds / unit.seconds) };
  const y = createAxis(0, Math.max(1, ...counts), AREA.bottom, AREA.top, 4);
  const whole = { ...y, ticks: y.ticks.filter(Number.isInteger) };
  const bars = counts.map((count, i) => {
    const from = x.at((i * settings.horizon) / BARS);
    const to = x.at(((i + 1) * settings.horizon) / BARS);
    return count === 0
      ? ''
      : html`<rect class="bar" x="${(from + 0.5).toFixed(1)}" width="${(to - from - 1).toFixed(1)}" y="${y.at(count).toFixed(1)}" height="${(AREA.bottom - y.at(count)).toFixed(1)}"/>`;
  });
  const least = x.at(settings.leastLead);
  const median = score.lead.median;
  const marks = html`<path class="least" d="M${least.toFixed(1)} ${AREA.top - 20}V${AREA.bottom}"/><text x="${Math.max(AREA.left + 30, least).toFixed(1)}" y="${AREA.top - 24}" text-anchor="middle" class="mark">least lead ${spanWords(settings.leastLead)}</text>${
    median === null
      ? null
      : html`<path class="median" d="M${(x.at(median) - 4.5).toFixed(1)} ${AREA.top - 8}h9l-4.5 8z"/>`
  }`;
  const words = `lead${request.delay > 0 ? ', less the delay' : ''} (${unit.words})`;
  return drawing(
    `Leads of the ${leads.length} warned switches of the judged part`,
    html`${axisLeft(whole, AREA, 'switches')}${bars}${axisBelow(axis, AREA, words)}${marks}`,
    html`<p class="note">${median === null ? 'No switch was warned.' : html`Triangle: the median, ${spanWords(median)}.`}</p>`,
  );
}

/** Window against rank with what was tried: the darker, the more skill on folds that did not choose. */
export function settingsMap(result: RehearsalResult): Html {
  const { settings } = result;
  const pairs = result.pairs.filter(({ variable }) => variable === 'forcing');
  if (pairs.length === 0) return html`<p class="note">No windows and ranks were searched.</p>`;
  const windows = [...new Set(pairs.map(({ delays }) => delays))].sort((a, b) => a - b);
  const ranks = [...new Set(pairs.map(({ rank }) => rank))].sort((a, b) => a - b);
  const wide = (AREA.right - AREA.left) / windows.length;
  const high = (AREA.bottom - AREA.top) / ranks.length;
  const most = Math.max(1e-9, ...pairs.map(({ skill }) => skill));
  const cells = pairs.map(({ delays, rank, skill }) => {
    const [x, y] = [
      AREA.left + wide * windows.indexOf(delays),
      AREA.bottom - high * (ranks.indexOf(rank) + 1),
    ];
    const share = Math.max(0, Number.isFinite(skill) ? skill : 0) / most;
    const chosen = settings.variable === 'forcing' && delays === settings.delays && rank === settings.rank;
    const words = Math.round(100 * Math.max(0, skill || 0));
    return html`<rect class="cell" x="${(x + 0.5).toFixed(1)}" y="${(y + 0.5).toFixed(1)}" width="${(wide - 1).toFixed(1)}" height="${(high - 1).toFixed(1)}" fill-opacity="${(0.06 + 0.84 * share).toFixed(3)}"/>${
      wide > 22
        ? html`<text class="${share > 0.6 ? 'onCell' : 'inCell'}" x="${(x + wide / 2).toFixed(1)}" y="${(y + high / 2 + 4).toFixed(1)}" text-anchor="middle">${words}</text>`
        : null
    }${chosen ? html`<rect class="chosenCell" x="${(x + 1.5).toFixed(1)}" y="${(y + 1.5).toFixed(1)}" width="${(wide - 3).toFixed(1)}" height="${(high - 3).toFixed(1)}"/>` : null}`;
  });
  const every = Math.ceil(windows.length / 9);
  const unit = spanUnitOf(windows.at(-1)! * settings.interval);
  const below = windows.map((delays, i) =>
    i % every === 0
      ? html`<text x="${(AREA.left + wide * (i + 0.5)).toFixed(1)}" y="${AREA.bottom + 16}" text-anchor="middle">${shortWords((delays * settings.interval) / unit.seconds)}</text>`
      : '',
  );
  const left = ranks.map(
    (rank, i) =>
      html`<text x="${AREA.left - 6}" y="${(AREA.bottom - high * (i + 0.5) + 4).toFixed(1)}" text-anchor="end">${rank}</text>`,
  );
  return drawing(
    'Windows and ranks tried on the tuning part',
    html`${cells}${below}${left}<text class="title" x="${AREA.left}" y="${AREA.top - 12}">rank</text><text class="title" x="${(AREA.left + AREA.right) / 2}" y="${AREA.bottom + 33}" text-anchor="middle">window (${unit.words})</text>`,
    html`<p class="note">Skill in hundredths, on folds that did not choose the threshold; the frame is what was chosen.</p>`,
  );
}

function drawing(title: string, inside: Html, below: Html): Html {
  return html`<figure><figcaption>${title}</figcaption><svg viewBox="0 0 ${WIDTH} ${HEIGHT}" role="img" aria-label="${title}">${inside}</svg>${below}</figure>`;
}
