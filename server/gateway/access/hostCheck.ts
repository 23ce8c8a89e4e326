import type { IncomingMessage } from 'node:http';
import { isIP, isIPv4 } from 'node:net';
import { hostname } from 'node:os';

const LOOPBACK = new Set(['localhost', '127.0.0.1', '::1']);

/** Whether an address to listen on can be reached from this machine only. */
export const isLoopback = (address: string): boolean =>
  LOOPBACK.has(address) || (isIPv4(address) && address.startsWith('127.'));

/** An address as it stands in a URL. */
export const inUrl = (address: string): string => (address.includes(':') ? `[${address}]` : address);

/** The name of a Host header without its port; IPv6 without brackets. */
function nameOf(host: string): string {
  const name = host.replace(/:\d+$/, '').toLowerCase();
  return name.startsWith('[') && name.endsWith(']') ? name.slice(1, -1) : name;
}

/** The host and port an Origin header names, or null. */
function originHost(origin: string): string | null {
  try {
    const { protocol, host } = new URL(origin);
    return protocol === 'http:' || protocol === 'https:' ? host : null;
  } catch {
    return null;
  }
}

/**
 * Why a request may not come in, or null. A page of another origin must not steer the server through its reader's
 * browser, nor reach it under a name of its own that points here (a DNS name: an address in the Host header is nobody's
 * own name, so a server that listens wider takes any).
 */
export type HostCheck = (headers: IncomingMessage['headers']) => string | null;

/**
 * @param listen address listened on
 * @param names  names the server is reached by, beside this machine's own
 */
export function createHostCheck(listen: string, names: readonly string[]): HostCheck {
  const wide = !isLoopback(listen);
  const known = new Set([...LOOPBACK, ...names.map((name) => name.toLowerCase())]);
  if (wide) for (const name of [listen, hostname()]) known.add(name.toLowerCase());
  return ({ host = '', origin }) => {
    const name = nameOf(host);
    if (!known.has(name) && !(wide && isIP(name) !== 0))
      return wide
        ? `the request names host "${host}"; ask for this machine by its address, or start with --name ${name || 'NAME'}`
        : `the request names host "${host}"; ask for http://localhost or http://127.0.0.1`;
    // a proxy that adds TLS changes the scheme, never the host
    if (origin !== undefined && originHost(origin) !== host.toLowerCase())
      return `a page of ${origin} may not use this server; open its own page at ${host}`;
    return null;
  };
}
