import type uPlot from 'uplot';
import { SWITCH_OUTCOMES, WARNING_OUTCOMES } from '../../shared-types/outcomes.ts';
import type { OperatingRow, RehearsalResult } from '../../shared-types/rehearsal.ts';
import { element } from '../dom.ts';
import { gapSeconds } from '../drawingData.ts';
import { ink } from '../strip/ink.ts';
import { beyondLevel, dashedLevel, hatchStretches } from '../strip/marks.ts';
import { createLanes, SWITCH_SIGNS, WARNING_SIGNS } from './lanes.ts';
import { leftOutVeil } from './leftOutVeil.ts';
import { type Lane, nearestSwitch, outcomesOf, switchLanes, warningLanes } from './operating.ts';
import { recordingColumns, variableColumns } from './requests.ts';
import { createRoll } from './roll.ts';
import { placeOn } from './sheet.ts';

/** The whole recording with what became of every switch and every warning. */
export interface WholeStrip {
  root: HTMLElement;
  follow(row: OperatingRow): void;
  /** rings a switch; null: none */
  ring(index: number | null): void;
}

/** CSS pixels within which a switch counts as meant. */
const REACH = 12;

/** Creates the strip; `opened` runs with the index of a switch whose card is wanted. */
export function createWholeStrip(
  id: string,
  result: RehearsalResult,
  unit: string,
  opened: (index: number) => void,
): WholeStrip {
  const { table, recordings, request, settings } = result;
  const channel = request.channels[0]!;
  const warned = outcomesOf(table.rows, ({ outcome }) => outcome, WARNING_OUTCOMES);
  const met = outcomesOf(table.rows, ({ switches }) => switches, SWITCH_OUTCOMES);
  const upper = createLanes(met, SWITCH_SIGNS, 'down');
  const lower = createLanes(warned, WARNING_SIGNS, 'up');
  let row = table.rows[result.chosenRow]!;
  let chosen: number | null = null;
  let switches: Lane<(typeof met)[number]>[] = [];
  let warnings: Lane<(typeof warned)[number]>[] = [];

  const under = (plot: uPlot) => hatchStretches(plot, tuningStretches());
  const roll = createRoll({
    label: `${channel}: the whole recording, its switches and its warnings`,
    above: [upper.root],
    below: [lower.root],
    lines: [
      {
        name: () => channel,
        unit: () => unit,
        height: 150,
        colour: () => ink().ink,
        fetch: (index, from, to, columns) =>
          recordingColumns(recordings[index]!.name.replace(/^stored:/, ''), channel, from, to, columns),
        gap: (from, to, columns) => gapSeconds(settings.interval, { seconds: to - from, columns }),
        under,
        over: (plot) => leftOutVeil(plot, roll.sheet(), result.leftOut),
      },
      {
        name: () => settings.variable,
        unit: () => (settings.variable === 'forcing' ? 'sd' : unit),
        height: 92,
        colour: () => ink().pen,
        fetch: (index, from, to, columns) => variableColumns(id, index, from, to, columns),
        gap: (from, to, columns) => gapSeconds(settings.interval, { seconds: to - from, columns }),
        include: () => [row.threshold, row.rearm],
        under,
        over: (plot, line) => {
          dashedLevel(plot, row.rearm, ink().edge, [2, 4]);
          dashedLevel(plot, row.threshold, ink().red, [7, 4]);
          beyondLevel(plot, line, row.threshold, settings.direction !== 'falling');
        },
      },
    ],
    viewed: () => drawLanes(),
    activated: (place) => {
      const { from, to, width } = roll.view();
      const found = nearestSwitch(places, place, (REACH * (to - from)) / width);
      if (found >= 0) opened(found);
    },
  });
  const lay = recordings.map(({ from, to }) => ({ from, to }));
  roll.lay(lay);
  const sheet = roll.sheet();
  const places = Float64Array.from(result.switches, ({ recording, at }) => placeOn(sheet, recording, at));
  const starts = Float64Array.from(sheet.pieces, ({ start, from }) => start - from);

  function tuningStretches() {
    return recordings.flatMap(({ from, judgedFrom }, index) => {
      const piece = roll.sheet().pieces[index]!;
      const end = Math.min(judgedFrom, piece.to);
      return end > from ? [{ from: piece.start, to: piece.start + (end - from) }] : [];
    });
  }
  function drawLanes() {
    const view = roll.view();
    const place = chosen === null ? null : places[chosen]!;
    upper.draw(switches, view, place);
    lower.draw(warnings, view, null);
  }
  const key = element(
    'p',
    'legend stripKey',
    element('span', '', element('b', 'hatched'), ' tuning part: chosen on, not judged'),
    element('span', '', element('b', 'red', '╌╌'), ' threshold'),
    element('span', '', element('b', '', '┈┈'), ' re-arms below'),
  );
  return {
    root: element('div', 'wholeStrip', roll.root, key),
    follow: (next) => {
      row = next;
      switches = switchLanes(row, places, met);
      warnings = warningLanes(row, starts, warned);
      roll.draw();
    },
    ring: (index) => {
      chosen = index;
      drawLanes();
    },
  };
}
