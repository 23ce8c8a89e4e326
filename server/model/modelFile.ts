import { MODEL_FILE_VERSION, type Model } from '../../shared-types/model.ts';
import type { VerdictKind } from '../../shared-types/rehearsal.ts';
import { RegimeRule, WatchRule } from '../../shared-types/watch.ts';
import { InputError } from '../signal/inputError.ts';
import { decodeFloats, encodeFloats } from './base64.ts';

const VERDICT_KINDS: readonly VerdictKind[] = [
  'too few events',
  'no skill',
  'no better than',
  'weak',
  'useful',
];

/** A model file as parsed: arrays of numbers are still base64 text. */
type Document = { [key: string]: unknown };

/** What brings a file of one version forward to the next; filled as versions come. */
const FORWARD: { [fromVersion: number]: (document: Document) => Document } = {};

/** The model as the text of a model file: one JSON document, arrays base64 little-endian float64. */
export function modelToJson(model: Model): string {
  const { diagnostics } = model;
  return `${JSON.stringify(
    {
      kind: 'foreshift model',
      version: MODEL_FILE_VERSION,
      ...model,
      coordinates: encodeFloats(model.coordinates),
      singularValues: encodeFloats(model.singularValues),
      spectrum: encodeFloats(model.spectrum),
      A: encodeFloats(model.A),
      B: encodeFloats(model.B),
      diagnostics: {
        ...diagnostics,
        r2: encodeFloats(diagnostics.r2),
        heldOut: diagnostics.heldOut && {
          ...diagnostics.heldOut,
          oneStepR2: encodeFloats(diagnostics.heldOut.oneStepR2),
        },
      },
    },
    null,
    1,
  )}\n`;
}

/**
 * Reads a model file; older versions are brought forward.
 *
 * @throws InputError with code NOT_A_MODEL, MODEL_DAMAGED or MODEL_NEWER, in one sentence
 */
export function modelFromJson(text: string): Model {
  let document = parse(text);
  let version = document.version as number;
  if (version > MODEL_FILE_VERSION) {
    throw new InputError(
      'MODEL_NEWER',
      `the model file is of version ${version}, this program reads up to ${MODEL_FILE_VERSION}; use a newer program or fit the recording again`,
    );
  }
  for (; version < MODEL_FILE_VERSION; version++) document = FORWARD[version]!(document);
  const model = assemble(document);
  checkSizes(model);
  return model;
}

function parse(text: string): Document {
  let document: unknown;
  try {
    document = JSON.parse(text);
  } catch {
    throw damaged('it is not complete JSON');
  }
  const { kind, version } = (document ?? {}) as Document;
  if (kind !== 'foreshift model') {
    throw new InputError(
      'NOT_A_MODEL',
      'the file holds JSON but no model, expected one written by foreshift fit; check its name',
    );
  }
  if (!Number.isInteger(version) || (version as number) < 1)
    throw damaged('its version is no whole number from 1 up');
  return document as Document;
}

function assemble(document: Document): Model {
  const diagnostics = part(document, 'diagnostics');
  const heldOut = diagnostics.heldOut === null ? null : part(diagnostics, 'heldOut');
  // keys that this version does not know are not carried along
  return {
    name: string(document, 'name'),
    interval: number(document, 'interval'),
    delays: number(document, 'delays'),
    rank: number(document, 'rank'),
    channels: list(document, 'channels').map((entry) => ({
      channel: string(entry, 'channel'),
      unit: string(entry, 'unit'),
      mean: number(entry, 'mean'),
      scale: number(entry, 'scale'),
    })),
    center: document.center === 'none' ? 'none' : 'mean',
    coordinates: floats(document, 'coordinates'),
    singularValues: floats(document, 'singularValues'),
    spectrum: floats(document, 'spectrum'),
    A: floats(document, 'A'),
    B: floats(document, 'B'),
    diagnostics: {
      ...(diagnostics as unknown as Model['diagnostics']),
      r2: floats(diagnostics, 'r2'),
      heldOut: heldOut && {
        oneStepR2: floats(heldOut, 'oneStepR2'),
        freeRunCorrelation: number(heldOut, 'freeRunCorrelation'),
      },
    },
    gapIntervals: number(document, 'gapIntervals'),
    rule: byScheme(WatchRule, document, 'rule'),
    regime: byScheme(RegimeRule, document, 'regime'),
    regimeChannel: document.regimeChannel === null ? null : string(document, 'regimeChannel'),
    switchWord: string(document, 'switchWord'),
    validity:
      document.validity === null ? null : (part(document, 'validity') as unknown as Model['validity']),
    score: document.score === null ? null : (part(document, 'score') as unknown as Model['score']),
    ...verdictOf(document),
    ...operatingOf(document),
    provenance: part(document, 'provenance') as unknown as Model['provenance'],
  };
}

/** A verdict came later than version 1, and only a rehearsed model has one. */
function verdictOf(document: Document): Pick<Model, 'verdict'> {
  if (document.verdict === undefined) return {};
  const { kind, than } = part(document, 'verdict');
  const known = VERDICT_KINDS.find((each) => each === kind);
  if (known === undefined) throw damaged('its "verdict" cannot be used');
  return { verdict: { kind: known, than: typeof than === 'string' ? than : null } };
}

/** Operating points came later than version 1: files without them stay as they are. */
function operatingOf(document: Document): Pick<Model, 'operating'> {
  if (document.operating === undefined) return {};
  const orNull = (entry: Document, key: string) => (entry[key] === null ? null : number(entry, key));
  return {
    operating: list(document, 'operating').map((entry) => ({
      threshold: number(entry, 'threshold'),
      rearm: number(entry, 'rearm'),
      falsePerHour: orNull(entry, 'falsePerHour'),
      detection: orNull(entry, 'detection'),
      cameTrue: orNull(entry, 'cameTrue'),
    })),
  };
}

function checkSizes({
  delays,
  rank,
  channels,
  coordinates,
  singularValues,
  spectrum,
  A,
  B,
  interval,
}: Model): void {
  const rows = channels.length * delays;
  if (!(interval > 0) || !(rank >= 2) || !(rank <= rows))
    throw damaged('its interval, delays and rank contradict each other');
  const sizes: [string, Float64Array, number][] = [
    ['coordinates', coordinates, rows * rank],
    ['singularValues', singularValues, rank],
    ['spectrum', spectrum, rows],
    ['A', A, (rank - 1) ** 2],
    ['B', B, rank - 1],
  ];
  for (const [name, values, size] of sizes) {
    if (values.length !== size) throw damaged(`"${name}" holds ${values.length} numbers, expected ${size}`);
    if (!values.every(Number.isFinite)) throw damaged(`"${name}" holds a number that is not finite`);
  }
}

function byScheme<T>(
  scheme: { safeParse(value: unknown): { success: boolean; data?: T } },
  document: Document,
  key: string,
): T | null {
  if (document[key] === null) return null;
  const result = scheme.safeParse(document[key]);
  if (!result.success) throw damaged(`its "${key}" cannot be used`);
  return result.data as T;
}

function floats(document: Document, key: string): Float64Array {
  const values = typeof document[key] === 'string' ? decodeFloats(document[key]) : null;
  if (values === null) throw damaged(`"${key}" is no base64 of float64 numbers`);
  return values;
}

function number(document: Document, key: string): number {
  const value = document[key];
  if (typeof value !== 'number' || !Number.isFinite(value)) throw damaged(`"${key}" is no number`);
  return value;
}

function string(document: Document, key: string): string {
  const value = document[key];
  if (typeof value !== 'string') throw damaged(`"${key}" is no text`);
  return value;
}

function part(document: Document, key: string): Document {
  const value = document[key];
  if (typeof value !== 'object' || value === null || Array.isArray(value))
    throw damaged(`"${key}" is missing`);
  return value as Document;
}

function list(document: Document, key: string): Document[] {
  const value = document[key];
  if (!Array.isArray(value) || value.length === 0) throw damaged(`"${key}" is no list`);
  return value.map((entry) => (typeof entry === 'object' && entry !== null ? (entry as Document) : {}));
}

function damaged(what: string): InputError {
  return new InputError(
    'MODEL_DAMAGED',
    `the model file is damaged: ${what}; take an intact copy or fit the recording again`,
  );
}
