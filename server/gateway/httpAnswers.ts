import { Encoder } from 'cbor-x';
import type { NextFunction, Request, Response } from 'express';
import type { z } from 'zod';
import { InputError } from '../signal/inputError.ts';
import { looksLikeTime, parseTime } from '../signal/time.ts';
import { complaint } from './ingestFrame.ts';
import { Refused } from './watches.ts';

const encoder = new Encoder({ useRecords: false });

/** Answers with an RFC 9457 problem. */
export function problem(
  response: Response,
  status: number,
  title: string,
  detail: string,
  code: string,
): void {
  response.status(status).type('application/problem+json');
  response.send(JSON.stringify({ type: 'about:blank', title, status, detail, code }));
}

/**
 * What a body or query says, by its schema.
 *
 * @throws Refused BAD_REQUEST with what is wrong
 */
export function read<T>(schema: z.ZodType<T>, source: unknown): T {
  const parsed = schema.safeParse(source ?? {});
  if (!parsed.success)
    throw new Refused(400, 'BAD_REQUEST', `the request cannot be used: ${complaint(parsed.error)}`);
  return parsed.data;
}

/** A query's value where it is given once. */
export const text = (value: unknown): string | undefined => (typeof value === 'string' ? value : undefined);

/**
 * A number or RFC 3339 time of the query.
 *
 * @throws Refused BAD_QUERY
 */
export function numberIn(query: Request['query'], name: string, fallback: number): number {
  const given = text(query[name]);
  if (given === undefined || given === '') return fallback;
  const number = looksLikeTime(given) ? parseTime(given) : Number(given);
  if (Number.isFinite(number)) return number;
  throw new Refused(
    400,
    'BAD_QUERY',
    `${name} is "${given.slice(0, 60)}"; give a number or an RFC 3339 time`,
  );
}

/** A whole number that stands in a path. */
export function numberOf(request: Request, name: string): number {
  const given = String(request.params[name]);
  if (/^\d{1,15}$/.test(given)) return Number(given);
  throw new Refused(
    404,
    'NOT_THERE',
    `"${given.slice(0, 60)}" is not a number; expected the ${name} of a list`,
  );
}

/** Whether the answer is to be CBOR rather than JSON. */
export const wantsCbor = (request: Request): boolean =>
  request.accepts(['application/json', 'application/cbor']) === 'application/cbor';

const plain = (_key: string, value: unknown): unknown =>
  ArrayBuffer.isView(value) ? Array.from(value as unknown as ArrayLike<number>) : value;

/** Answers in CBOR (typed arrays by RFC 8746) or JSON (typed arrays as plain ones, null for NaN), as asked for. */
export function sendEither(request: Request, response: Response, value: unknown): void {
  if (wantsCbor(request)) response.type('application/cbor').send(Buffer.from(encoder.encode(value)));
  else response.type('application/json').send(JSON.stringify(value, plain));
}

/** From when to when and in how many columns a query wants drawing data; left out: the last minute before `newest`. */
export function columnsAsked(query: Request['query'], newest: number | null, span = 60) {
  const to = numberIn(query, 'to', newest ?? 0);
  const from = numberIn(query, 'from', to - span);
  const columns = Math.round(numberIn(query, 'columns', 1000));
  if (from >= to) throw new Refused(400, 'BAD_QUERY', `from (${from}) is not before to (${to}); swap them`);
  if (columns < 1 || columns > 20_000)
    throw new Refused(400, 'BAD_QUERY', `columns is ${columns}; ask for 1 to 20000`);
  return { from, to, columns };
}

/** The last middleware: every error as a problem. */
export function answerError(
  error: unknown,
  _request: Request,
  response: Response,
  _next: NextFunction,
): void {
  if (response.headersSent) {
    response.destroy();
    return;
  }
  const { status, type, message } = error as { status?: number; type?: string; message: string };
  if (error instanceof Refused)
    problem(
      response,
      error.status,
      error.status === 404 ? 'Not found' : 'Cannot be done',
      message,
      error.code,
    );
  else if (error instanceof InputError) problem(response, 400, 'Cannot be used', message, error.code);
  else if (type === 'entity.parse.failed')
    problem(
      response,
      400,
      'Not JSON',
      `the body is not JSON: ${message}; send one JSON document`,
      'NOT_JSON',
    );
  else if (type === 'entity.too.large')
    problem(response, 413, 'Too large', 'the body is too large; send a smaller one', 'TOO_LARGE');
  else if (status !== undefined && status >= 400 && status < 500)
    problem(response, status, 'Cannot be used', message, 'BAD_REQUEST');
  else problem(response, 500, 'Failed', message, 'FAILED');
}
