import type express from 'express';
import { z } from 'zod';
import { Condition, NewMark } from '../../../shared-types/rehearsal.ts';
import type { LeftOutRegistry } from '../watches/leftOut.ts';
import { numberOf, read } from './httpAnswers.ts';

const End = z.object({
  /** seconds, channel time; left out: the channel's newest sample */
  to: z.number().finite().nullable().default(null),
  by: z.string().max(80).default(''),
});

/** What is left out: marked stretches and conditions. */
export function routeMarks(app: express.Express, leftOut: LeftOutRegistry): void {
  app.get('/api/marks', (_request, response) => {
    response.json(leftOut.marks());
  });
  app.post('/api/marks', async (request, response) => {
    response.status(201).json(await leftOut.addMark(read(NewMark, request.body)));
  });
  app.post('/api/marks/:id/end', async (request, response) => {
    const { to, by } = read(End, request.body);
    response.json(await leftOut.endMark(numberOf(request, 'id'), to, by));
  });
  app.delete('/api/marks/:id', async (request, response) => {
    await leftOut.removeMark(numberOf(request, 'id'));
    response.status(204).end();
  });
  app.get('/api/conditions', (_request, response) => {
    response.json(leftOut.conditions());
  });
  app.post('/api/conditions', async (request, response) => {
    response.status(201).json(await leftOut.addCondition(read(Condition, request.body)));
  });
  app.delete('/api/conditions', async (request, response) => {
    await leftOut.removeSameCondition(read(Condition, request.body));
    response.status(204).end();
  });
  app.delete('/api/conditions/:id', async (request, response) => {
    await leftOut.removeCondition(numberOf(request, 'id'));
    response.status(204).end();
  });
}
