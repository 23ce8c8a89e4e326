import type express from 'express';
import type { NextFunction, Request, Response } from 'express';
import { z } from 'zod';
import type { WhoAmI } from '../../../shared-types/access.ts';
import type { Access, Identity } from '../access/access.ts';
import { may, ruleOf } from '../access/accessRules.ts';
import type { Log } from '../logLines.ts';
import { problem, read } from './httpAnswers.ts';
import { whyUnknown } from './upgrades.ts';

const SignIn = z.strictObject({ token: z.string().min(1).max(200) });

const remoteOf = (request: Request): string => request.socket.remoteAddress ?? '';

function turnAway(response: Response, refusal: ReturnType<typeof whyUnknown>): void {
  response.set(refusal.headers ?? {});
  problem(response, refusal.status, refusal.detail, refusal.code);
}

/** Lets a request on to the routes if its token may use the one it asks for, and logs every change that is asked for. */
export function gate(access: Access, log: Log) {
  return (request: Request, response: Response, next: NextFunction): void => {
    const { method, path } = request;
    const rule = ruleOf(method, path);
    const known = access.identify(request);
    const identity = known.ok ? known.identity : null;
    response.locals.identity = identity;
    if (method !== 'GET' && method !== 'HEAD')
      response.once('finish', () => {
        const { statusCode: status } = response;
        const who = identity?.name ? { who: identity.name } : {};
        const text = `${method} ${path} was answered ${status}`;
        log({
          level: 'notice',
          event: 'request',
          text,
          remote: remoteOf(request),
          method,
          path,
          status,
          ...who,
        });
      });
    if (may(identity, rule)) {
      next();
      return;
    }
    if (!known.ok) {
      turnAway(response, whyUnknown(known.why));
      return;
    }
    const { name, role } = known.identity;
    problem(
      response,
      403,
      role === 'producer'
        ? `the token "${name}" is a producer's: it may feed its channels at /ingest, and nothing else`
        : `the token "${name}" is a viewer's: it may look, not change anything; sign in with an operator's`,
      'NOT_ALLOWED',
    );
  };
}

/** Who did it is the token's name, where the person did not say. */
export function nameTheDoer(request: Request, response: Response, next: NextFunction): void {
  const identity = response.locals.identity as Identity | null;
  const body = request.body as { by?: unknown } | undefined;
  if (identity?.name && typeof body === 'object' && body !== null && body.by === '') body.by = identity.name;
  next();
}

/** Who a page is: asked, exchanged for a token once, and given up. */
export function routeAccess(app: express.Express, access: Access, log: Log): void {
  const whoAmI = (identity: Identity | null): WhoAmI => {
    const role = identity?.role ?? null;
    return {
      tokens: access.asked,
      role: role === 'everything' ? 'operator' : role === 'producer' ? null : role,
      name: identity?.name || null,
    };
  };
  app.get('/access', (_request, response) => {
    response.json(whoAmI(response.locals.identity as Identity | null));
  });
  app.post('/access', (request, response) => {
    const remote = remoteOf(request);
    const signedIn = access.signIn(read(SignIn, request.body).token, request);
    if (!signedIn.ok && signedIn.why === 'producer') {
      const detail =
        'this is a producer’s token: it feeds channels; sign in with an operator’s or a viewer’s';
      problem(response, 403, detail, 'NOT_ALLOWED');
      return;
    }
    if (!signedIn.ok) {
      log({
        level: 'warning',
        event: 'sign-in refused',
        text: `somebody at ${remote} gave a wrong token`,
        remote,
      });
      turnAway(response, whyUnknown(signedIn.why === 'too many' ? 'too many' : 'wrong'));
      return;
    }
    const { identity, cookie } = signedIn;
    if (cookie !== '') response.set('Set-Cookie', cookie);
    log({
      level: 'notice',
      event: 'signed in',
      text: `"${identity.name}" signed in`,
      remote,
      who: identity.name,
    });
    response.json(whoAmI(identity));
  });
  app.delete('/access', (request, response) => {
    const cookie = access.signOut(request);
    if (cookie !== '') response.set('Set-Cookie', cookie);
    response.status(204).end();
  });
}
