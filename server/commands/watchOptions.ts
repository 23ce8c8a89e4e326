import { appendFileSync, closeSync, openSync } from 'node:fs';
import { readFile } from 'node:fs/promises';
import { createSecureContext } from 'node:tls';
import { readTokens } from '../gateway/access/accessTokens.ts';
import { isLoopback } from '../gateway/access/hostCheck.ts';
import type { Tls } from '../gateway/http/httpServer.ts';
import { createLog, type Log } from '../gateway/logLines.ts';
import { InputError } from '../signal/inputError.ts';

export const unixSeconds = (): number => Date.now() / 1000;

/**
 * Whether tokens are asked for: always where others can connect.
 *
 * @throws InputError NO_TOKENS when they are and there is none: nobody could come in, or everybody
 */
export function asksForTokens(listen: string, asked: boolean, data: string): boolean {
  const wide = !isLoopback(listen);
  if (!wide && !asked) return false;
  if (readTokens(data).length > 0) return true;
  const why = wide
    ? `--listen is ${listen}: other machines could connect, and there is no token yet that says who may do what`
    : '--tokens asks for tokens, and there is none yet';
  throw new InputError(
    'NO_TOKENS',
    `${why}; create one with foreshift token create NAME --role operator --data ${data}${wide ? ', or leave --listen out' : ''}`,
  );
}

/**
 * Certificate and key to listen with; null: none.
 *
 * @throws InputError when one is missing or they do not go together
 */
export async function tlsChoice(
  certificate: string | undefined,
  key: string | undefined,
): Promise<Tls | null> {
  if (certificate === undefined && key === undefined) return null;
  if (certificate === undefined || key === undefined)
    throw new InputError(
      'CERTIFICATE_AND_KEY',
      `--${certificate === undefined ? 'key' : 'certificate'} is given alone; TLS needs both, --certificate FILE --key FILE`,
    );
  const read = (name: string, file: string) =>
    readFile(file).catch((error: NodeJS.ErrnoException) => {
      throw new InputError(
        'NO_CERTIFICATE',
        `--${name} ${file} cannot be read (${error.code}); name a PEM file`,
      );
    });
  const tls = { certificate: await read('certificate', certificate), key: await read('key', key) };
  try {
    createSecureContext({ cert: tls.certificate, key: tls.key });
  } catch (error) {
    throw new InputError(
      'BAD_CERTIFICATE',
      `${certificate} and ${key} cannot be used together (${(error as Error).message}); name a certificate and its own key, both PEM, the key without a password`,
    );
  }
  return tls;
}

/**
 * The log that is asked for.
 *
 * @throws InputError when its form is unknown or its file cannot be written
 */
export async function logChoice(form: string | undefined, file: string | undefined): Promise<Log> {
  if (form !== undefined && form !== 'sentences' && form !== 'json')
    throw new InputError('BAD_OPTION', `--log is "${form}", expected sentences or json; write --log json`);
  if (file === undefined)
    return createLog(form ?? 'sentences', (line) => process.stderr.write(line), unixSeconds);
  try {
    closeSync(openSync(file, 'a', 0o640));
  } catch (error) {
    throw new InputError(
      'NO_LOG',
      `--log-to ${file} cannot be written (${(error as NodeJS.ErrnoException).code}); name a file in a folder that is there`,
    );
  }
  // opened for each line: who moves the file away to keep it gets a new one
  return createLog(form ?? 'sentences', (line) => append(file, line), unixSeconds);
}

function append(file: string, line: string): void {
  try {
    appendFileSync(file, line);
  } catch {
    // a full disk must not stop the server: what matters is told on its pages as well
    process.stderr.write(line);
  }
}
