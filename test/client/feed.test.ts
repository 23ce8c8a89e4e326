import { Encoder } from 'cbor-x';
import { describe, expect, it } from 'vitest';
import { readMessage } from '../../client/feed.ts';

const encoder = new Encoder({ useRecords: false });
const frame = (value: unknown): ArrayBuffer => Uint8Array.from(encoder.encode(value)).buffer;

describe('a frame from the server', () => {
  it('is read with its typed arrays as they were', () => {
    const columns = {
      t: Float64Array.of(1.25, 2.5),
      low: Float64Array.of(-1, NaN),
      high: Float64Array.of(1, NaN),
    };
    const message = readMessage(frame({ kind: 'trace', watch: 'a', columns, replace: false }));
    expect(message).toMatchObject({ kind: 'trace', watch: 'a', replace: false });
    expect(message?.kind === 'trace' && message.columns.t).toEqual(columns.t);
    expect(message?.kind === 'trace' && message.columns.low).toEqual(columns.low);
  });

  it('is passed over when it is no message', () => {
    expect(readMessage('text')).toBeNull();
    expect(readMessage(frame(42))).toBeNull();
    expect(readMessage(frame({ no: 'kind' }))).toBeNull();
    expect(readMessage(Uint8Array.of(0x9f, 0x01).buffer)).toBeNull();
  });
});
