import { STATUS_CODES } from 'node:http';
import { Encoder } from 'cbor-x';
import type { NextFunction, Request, Response } from 'express';
import type { z } from 'zod';
import { InputError } from '../../signal/inputError.ts';
import { looksLikeTime, parseTime } from '../../signal/time.ts';
import { complaint } from '../complaint.ts';
import type { Log } from '../logLines.ts';
import { Refused } from '../refused.ts';

const encoder = new Encoder({ useRecords: false });

/** The phrase of a status as RFC 9110 has it; Node's own of 413 is the older one. */
const titleOf = (status: number): string =>
  status === 413 ? 'Content Too Large' : (STATUS_CODES[status] ?? 'Error');

/**
 * The body of a problem by RFC 9457: of no type of its own (4.2.1), so its title is the status's; `code` is the stable
 * name of what went wrong.
 */
export const problemJson = (status: number, detail: string, code: string): string =>
  JSON.stringify({ type: 'about:blank', title: titleOf(status), status, detail, code });

/** Answers with a problem. */
export function problem(response: Response, status: number, detail: string, code: string): void {
  response.status(status).type('application/problem+json');
  response.send(problemJson(status, detail, code));
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

/** What is wrong with a request by its error: status, sentence, code. */
function judged(error: unknown): [number, string, string] {
  const { status = 500, type, message } = error as { status?: number; type?: string; message: string };
  if (error instanceof Refused) return [error.status, message, error.code];
  if (error instanceof InputError) return [400, message, error.code];
  if (type === 'entity.parse.failed')
    return [400, `the body is not JSON: ${message}; send one JSON document`, 'NOT_JSON'];
  if (type === 'entity.too.large') return [413, 'the body is too large; send a smaller one', 'TOO_LARGE'];
  if (status === 415) return [415, `${message}; send JSON in UTF-8, not packed or as gzip`, 'NOT_JSON'];
  if (status >= 400 && status < 500) return [status, `${message}; send it anew`, 'BAD_REQUEST'];
  return [500, message, 'FAILED'];
}

/** The last middleware: every error as a problem. */
export function answerErrors(log: Log) {
  // a middleware for errors is known by its four arguments
  return (error: unknown, request: Request, response: Response, _next: NextFunction): void => {
    const [status, detail, code] = judged(error);
    const { method, path } = request;
    if (status >= 500)
      log({
        level: 'error',
        event: 'request failed',
        text: `${method} ${path} failed: ${detail}`,
        method,
        path,
        status,
      });
    if (response.headersSent) response.destroy();
    else problem(response, status, detail, code);
  };
}
