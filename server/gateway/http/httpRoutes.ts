import type express from 'express';
import type { NextFunction, Request, Response } from 'express';
import { problem } from './httpAnswers.ts';

/** As the router keeps a route. */
interface Layer {
  route?: { path: string; methods: Record<string, boolean> };
  match(path: string): boolean;
}

const layersOf = (app: express.Express): Layer[] => (app.router as unknown as { stack: Layer[] }).stack;
const methodsOf = ({ route }: Layer): string[] =>
  Object.keys(route?.methods ?? {}).map((method) => method.toUpperCase());

/** Every route of an app, as "GET /api/channels". */
export const routesOf = (app: express.Express): string[] =>
  layersOf(app).flatMap((layer) => methodsOf(layer).map((method) => `${method} ${layer.route!.path}`));

/** After the routes: what is there but not by this method (405, with `Allow`), and what is not there (404). */
export function answerNothing(app: express.Express) {
  return ({ method, path }: Request, response: Response): void => {
    const methods = layersOf(app).flatMap((layer) =>
      layer.route && layer.match(path) ? methodsOf(layer) : [],
    );
    if (methods.length === 0) {
      problem(response, 404, `there is nothing at ${method} ${path}`, 'NOT_FOUND');
      return;
    }
    const allowed = [...new Set(methods.includes('GET') ? [...methods, 'HEAD'] : methods)].sort();
    response.set('Allow', allowed.join(', '));
    problem(
      response,
      405,
      `${path} takes ${allowed.join(', ')}, not ${method}; use one of these`,
      'OTHER_METHOD',
    );
  };
}

/** Text without a type of its own is taken for JSON as well: what says it is something else is not read. */
const JSON_TYPES = ['json', '+json', 'text/plain'];

/** Before the bodies are read: 415 for one that is not JSON. */
export function onlyJson(request: Request, response: Response, next: NextFunction): void {
  const type = request.headers['content-type'];
  if (type === undefined || request.is(JSON_TYPES) !== false) {
    next();
    return;
  }
  response.set('Accept', 'application/json');
  problem(
    response,
    415,
    `the body is ${type.slice(0, 100)}; send JSON, as content-type: application/json`,
    'NOT_JSON',
  );
}

/** At the addresses of the WebSockets, for whoever asks without wanting one. */
export function wantsUpgrade(request: Request, response: Response): void {
  response.set({ Upgrade: 'websocket', Connection: 'Upgrade' });
  problem(response, 426, `${request.path} is a WebSocket; connect to it as one`, 'UPGRADE_REQUIRED');
}
