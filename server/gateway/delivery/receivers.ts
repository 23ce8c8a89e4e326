import { readFile } from 'node:fs/promises';
import { resolve } from 'node:path';
import type { Receiver } from '../../../shared-types/delivery.ts';
import { InputError } from '../../signal/inputError.ts';
import type { Send } from './attempt.ts';
import { createProgram } from './program.ts';
import { createWebhook } from './webhook.ts';

/** A receiver that can be sent to. */
export interface OpenReceiver {
  name: string;
  kind: 'webhook' | 'program';
  /** whether it hears of a watch, by id or name */
  hears(watch: string, name: string): boolean;
  acts: boolean;
  outcomes: boolean;
  trials: boolean;
  send: Send;
}

/** A key this short could be guessed; HMAC asks for no less than half the hash's length (RFC 2104, section 3). */
const LEAST_SECRET_BYTES = 16;

async function secretText(receiver: Receiver, folder: string, environment: NodeJS.ProcessEnv) {
  const { name, secretFile, secretVariable } = receiver;
  if (secretVariable !== undefined) {
    const text = environment[secretVariable];
    if (text !== undefined) return text;
    throw new InputError(
      'NO_SECRET',
      `the receiver "${name}" has its secret in ${secretVariable}, which is not set; set it, or take secretVariable out`,
    );
  }
  if (secretFile === undefined) return null;
  return await readFile(resolve(folder, secretFile), 'utf8').catch((error: NodeJS.ErrnoException) => {
    throw new InputError(
      'NO_SECRET',
      `the secret of the receiver "${name}" cannot be read (${error.code}); put it into ${secretFile} in the data folder, or take secretFile out`,
    );
  });
}

async function keyOf(receiver: Receiver, folder: string, environment: NodeJS.ProcessEnv) {
  const text = (await secretText(receiver, folder, environment))?.replace(/\r?\n$/, '');
  if (text === undefined) return null;
  const key = Buffer.from(text, 'utf8');
  if (key.length >= LEAST_SECRET_BYTES) return key;
  throw new InputError(
    'SHORT_SECRET',
    `the secret of the receiver "${receiver.name}" has ${key.length} bytes, at least ${LEAST_SECRET_BYTES} are needed; make one with: openssl rand -base64 32`,
  );
}

/**
 * Receivers as settings.json names them, with their secrets read.
 *
 * @param folder the data folder
 * @param now    Unix seconds
 * @throws InputError when a secret cannot be had
 */
export async function openReceivers(
  receivers: readonly Receiver[],
  folder: string,
  environment: NodeJS.ProcessEnv,
  now: () => number,
): Promise<OpenReceiver[]> {
  return await Promise.all(
    receivers.map(async (receiver) => {
      const { name, url, command, watches, timeLimit, ...rest } = receiver;
      const key = await keyOf(receiver, folder, environment);
      const send =
        url === undefined
          ? createProgram({ command: command!, folder, timeLimit, environment })
          : createWebhook({ url, name, key, timeLimit, now });
      return {
        name,
        kind: url === undefined ? ('program' as const) : ('webhook' as const),
        hears: (watch: string, called: string) =>
          watches === undefined || watches.includes(watch) || watches.includes(called),
        acts: rest.acts,
        outcomes: rest.outcomes,
        trials: url !== undefined && rest.trials,
        send,
      };
    }),
  );
}
