import type express from 'express';
import { z } from 'zod';
import { ChannelName } from '../../../shared-types/channel.ts';
import type { Plays } from '../rehearsals/plays.ts';
import { read } from './httpAnswers.ts';

const Play = z.object({
  recording: z.string().min(1).max(200),
  pace: z
    .union([z.string(), z.number()])
    .transform(String)
    .refine((pace) => pace === 'max' || (/^\d+(\.\d+)?$/.test(pace) && Number(pace) > 0), {
      message: 'the pace is a number above 0, times as fast as recorded, or "max"',
    })
    .default('1'),
  as: ChannelName.optional(),
});

/** Recordings played into this server's own ingest. */
export function routePlays(app: express.Express, plays: Plays): void {
  app.get('/api/plays', (_request, response) => {
    response.json(plays.states());
  });
  app.post('/api/plays', (request, response) => {
    response.status(202).json(plays.start(read(Play, request.body)));
  });
  app.post('/api/plays/:id/stop', (request, response) => {
    response.json(plays.stop(String(request.params.id)));
  });
}
