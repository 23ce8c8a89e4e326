import type express from 'express';
import type { Request } from 'express';
import { z } from 'zod';
import { ChannelName } from '../../../shared-types/channel.ts';
import { RehearsalRequest } from '../../../shared-types/rehearsal.ts';
import { reportHtml } from '../../rehearsal/report.ts';
import type { Hub } from '../hub.ts';
import { Refused } from '../refused.ts';
import type { Rehearsals } from '../rehearsals/rehearsals.ts';
import { putIntoUse } from '../watches/putIntoUse.ts';
import { columnsAsked, numberIn, numberOf, read, sendEither, text, wantsCbor } from './httpAnswers.ts';

const Recorded = z.object({ recording: z.string().min(1).max(200), channel: ChannelName });
const Previewed = Recorded.extend({ regime: z.string().min(1).max(200) });
const Put = z.object({ row: z.number().int().nonnegative(), name: z.string().min(1).max(80).optional() });

/** Rehearsals: started, stopped, what they found, as a report, and put into use. */
export function routeRehearsals(app: express.Express, hub: Hub, rehearsals: Rehearsals): void {
  const idOf = (request: Request) => String(request.params.id);
  app.post('/api/rehearsals/preview', async (request, response) => {
    const { recording, channel, regime } = read(Previewed, request.body);
    response.json(await rehearsals.preview(recording, channel, regime));
  });
  app.post('/api/rehearsals/proposal', async (request, response) => {
    const { recording, channel } = read(Recorded, request.body);
    response.json(await rehearsals.proposal(recording, channel));
  });
  app.get('/api/rehearsals', (_request, response) => {
    response.json(rehearsals.states());
  });
  app.post('/api/rehearsals', (request, response) => {
    response.status(202).json(rehearsals.start(read(RehearsalRequest, request.body)));
  });
  app.get('/api/rehearsals/:id', (request, response) => {
    response.json(rehearsals.state(idOf(request)));
  });
  app.post('/api/rehearsals/:id/stop', (request, response) => {
    response.json(rehearsals.stop(idOf(request)));
  });
  app.get('/api/rehearsals/:id/result', async (request, response) => {
    if (wantsCbor(request))
      response.type('application/cbor').send(Buffer.from(await rehearsals.bytes(idOf(request))));
    else sendEither(request, response, await rehearsals.result(idOf(request)));
  });
  app.get('/api/rehearsals/:id/report.html', async (request, response) => {
    const report = reportHtml(await rehearsals.result(idOf(request)));
    response.set('Content-Disposition', `inline; filename="rehearsal-${idOf(request)}.html"`);
    response.type('text/html; charset=utf-8').send(report);
  });
  app.get('/api/rehearsals/:id/columns', async (request, response) => {
    const { recordings } = await rehearsals.result(idOf(request));
    const index = Math.round(numberIn(request.query, 'recording', 0));
    const recording = recordings[index];
    const asked = columnsAsked(
      request.query,
      recording?.to ?? null,
      recording === undefined ? undefined : recording.to - recording.from,
    );
    const { from, to, columns } = asked;
    sendEither(request, response, await rehearsals.columns(idOf(request), index, from, to, columns));
  });
  app.get('/api/rehearsals/:id/cards/:index', async (request, response) => {
    const row = text(request.query.row) === undefined ? null : numberIn(request.query, 'row', 0);
    const card = await rehearsals.card(idOf(request), numberOf(request, 'index'), row);
    sendEither(request, response, card);
  });
  app.post('/api/rehearsals/:id/watch', async (request, response) => {
    const { row, name } = read(Put, request.body);
    const result = await rehearsals.result(idOf(request));
    response.status(201).json(await putIntoUse(hub.watches, result, row, name ?? null));
  });
}

/** Drawing data of a stored recording: of its own channel, or of another over the same time. */
export function routeRecordingColumns(app: express.Express, hub: Hub): void {
  app.get('/api/recordings/columns', async (request, response) => {
    const recording = text(request.query.recording) ?? '';
    const range = await rangeOf(hub, recording);
    const channel = text(request.query.channel) ?? range.channel;
    if (!hub.channels.has(channel))
      throw new Refused(
        404,
        'NO_SUCH_CHANNEL',
        `there is no channel "${channel}"; GET /api/channels lists them`,
      );
    const { from, to, columns } = columnsAsked(request.query, range.to, range.to - range.from || 1);
    sendEither(request, response, await hub.store.signalColumns(channel, from, to, columns));
  });
}

async function rangeOf(hub: Hub, recording: string): Promise<{ channel: string; from: number; to: number }> {
  hub.recorder.flush();
  const name = recording.replace(/^stored:/, '');
  const all = await hub.store.recordings(hub.settings.recordingGap);
  const found = all.filter((one) => one.name === name || one.channel === name);
  if (recording.startsWith('stored:') && found.length > 0)
    return {
      channel: found[0]!.channel,
      from: Math.min(...found.map(({ from }) => from)),
      to: Math.max(...found.map(({ to }) => to)),
    };
  throw new Refused(
    404,
    'NO_RECORDING',
    `there is no recording "${recording.slice(0, 100)}"; GET /api/recordings lists them, as stored:CHANNEL or stored:CHANNEL/N`,
  );
}
