import type { RehearsalResult } from '../../shared-types/rehearsal.ts';
import { leadHistogram, settingsMap, tradeOff } from './report/figures.ts';
import {
  figure,
  type Html,
  html,
  hundredthWords,
  percentWords,
  rateWords,
  sentenceWords,
  spanWords,
} from './report/html.ts';
import { REPORT_STYLE } from './report/style.ts';
import { contenderTable, provenanceTable, scoreTable, settingsTable } from './report/tables.ts';
import { rateUnitOf } from './words.ts';

/**
 * A rehearsal as one HTML document that needs nothing else: no network, no script. It reads on a screen and prints on
 * A4. Every figure stands in a `<data>` element with the number itself as its value.
 */
export function reportHtml(result: RehearsalResult): string {
  const { verdict, sentence, request } = result;
  const channels = request.channels.join(', ');
  const title = `Rehearsal of ${channels}`;
  const document = html`<!DOCTYPE html>
<html lang="en">
<head>
<meta charset="utf-8"/>
<meta name="viewport" content="width=device-width, initial-scale=1"/>
<title>${title}</title>
<style>${{ html: REPORT_STYLE }}</style>
</head>
<body>
<header><span>Foreshift · ${title}</span><span>${result.at.slice(0, 10)}</span></header>
<p class="verdict">${verdictWords(result)}</p>
<h1>${sentenceWords(sentence)}</h1>
<p class="lead">${sentenceWords(verdict.sentence)}</p>
${headline(result)}
<div class="pair">${tradeOff(result)}${leadHistogram(result)}</div>
<section><h2>Score of the judged part</h2>
${scoreTable(result)}</section>
<section><h2>Beside plain baselines</h2>
${contenderTable(result)}</section>
<section><h2>Settings</h2>
<div class="pair">${settingsTable(result)}${settingsMap(result)}</div></section>
<section><h2>Where it comes from</h2>
${provenanceTable(result)}</section>
<p class="caution">An aid to attention, not a safety function: no interlock, no trip, no protection layer. Protective functions are governed by IEC 61508/61511 and local codes; licensed practice decides. What a rehearsal found holds for an experiment that goes on as it was recorded.</p>
</body>
</html>
`;
  return document.html;
}

const verdictWords = ({ verdict }: RehearsalResult): string =>
  verdict.than === null ? verdict.kind : `${verdict.kind} ${verdict.than}`;

function headline({ score }: RehearsalResult): Html {
  const range = (low: number | null, high: number | null, words: (value: number) => string) =>
    low === null || high === null ? null : html`<small>95 %: ${words(low)} to ${words(high)}</small>`;
  const { detection, cameTrue, falsePerHour, lead, skill, switches } = score;
  const unit = rateUnitOf(score.watchedSeconds);
  return html`<dl class="figures">
<div><dt>switches warned</dt><dd>${figure(switches.warned, String)} of ${figure(switches.total - switches.blind, String)}${range(detection.low, detection.high, percentWords)}</dd></div>
<div><dt>came true</dt><dd>${figure(cameTrue.value, percentWords)}${range(cameTrue.low, cameTrue.high, percentWords)}</dd></div>
<div><dt>false ${unit.words}</dt><dd>${figure(falsePerHour.value, rateWords(unit))}${range(falsePerHour.low, falsePerHour.high, rateWords(unit))}</dd></div>
<div><dt>median lead</dt><dd>${figure(lead.median, spanWords)}${lead.p10 === null || lead.p90 === null ? null : html`<small>8 of 10: ${spanWords(lead.p10)} to ${spanWords(lead.p90)}</small>`}</dd></div>
<div><dt>skill</dt><dd>${figure(skill, hundredthWords)}<small>0: knows nothing</small></dd></div>
</dl>`;
}
