import type { NextFunction, Request, Response } from 'express';

/** What a page may load and do: its own files, and talk to its own server. Nothing inline, nothing from elsewhere. */
const PAGE_POLICY = [
  "default-src 'none'",
  "script-src 'self'",
  "style-src 'self'",
  "img-src 'self'",
  "connect-src 'self'",
  "base-uri 'none'",
  "form-action 'none'",
  "frame-ancestors 'none'",
].join('; ');

/** A report is one document with its own style and nothing else: it runs nothing and loads nothing. */
export const REPORT_POLICY = [
  "default-src 'none'",
  "style-src 'unsafe-inline'",
  "base-uri 'none'",
  "form-action 'none'",
  "frame-ancestors 'none'",
  'sandbox',
].join('; ');

const REPORT = /^\/api\/rehearsals\/[^/]+\/report\.html$/;

/** Headers of every answer; what is not a file of the pages is kept nowhere. */
export function setHeaders(request: Request, response: Response, next: NextFunction): void {
  response.set({
    'Content-Security-Policy': REPORT.test(request.path) ? REPORT_POLICY : PAGE_POLICY,
    'X-Content-Type-Options': 'nosniff',
    'Referrer-Policy': 'no-referrer',
    'Cross-Origin-Opener-Policy': 'same-origin',
    'Cross-Origin-Resource-Policy': 'same-origin',
  });
  next();
}

/** After the pages' files: answers that change. */
export function keepNothing(_request: Request, response: Response, next: NextFunction): void {
  response.set('Cache-Control', 'no-store');
  next();
}
