import { readFileSync } from 'node:fs';

/** Name and version of this program, "foreshift 0.1.0", from the package.json above this file. */
export function programName(): string {
  for (const up of ['../../package.json', '../../../package.json']) {
    try {
      const { name, version } = JSON.parse(readFileSync(new URL(up, import.meta.url), 'utf8')) as {
        name?: string;
        version?: string;
      };
      if (name === 'foreshift') return `${name} ${version}`;
    } catch {
      // compiled files lie one folder deeper than their sources
    }
  }
  return 'foreshift';
}
