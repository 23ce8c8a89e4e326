import { Encoder } from 'cbor-x';
import { describe, expect, it } from 'vitest';
import { type DecodedFrame, decodeMessage } from '../../../../server/gateway/ingest/ingestFrame.ts';

const encoder = new Encoder({ useRecords: false });

function frame(message: string | Uint8Array, largest = 1000): DecodedFrame {
  const decoded = decodeMessage(message, largest);
  if (!decoded.ok || decoded.kind !== 'frame') throw new Error(JSON.stringify(decoded));
  return decoded.frame;
}

function fault(message: unknown, largest = 1000) {
  const raw =
    typeof message === 'string' || message instanceof Uint8Array ? message : JSON.stringify(message);
  const decoded = decodeMessage(raw, largest);
  if (decoded.ok) throw new Error('it was accepted');
  return decoded;
}

/** CBOR of {channel: "c", dt: 1, values: <tag>(<bytes>)}. */
function tagged(tag: number, bytes: number[]): Uint8Array {
  const text = (word: string) => [0x60 + word.length, ...Buffer.from(word)];
  const head = [0xa3, ...text('channel'), ...text('c'), ...text('dt'), 0x01, ...text('values')];
  return Uint8Array.from([...head, 0xd8, tag, 0x40 + bytes.length, ...bytes]);
}

describe('a frame', () => {
  it('is read from JSON, null as a missing value', () => {
    const read = frame('{"channel":"c","seq":3,"t0":10,"dt":0.5,"values":[1,null,-2.5]}');
    expect(read).toMatchObject({ channel: 'c', seq: 3, t0: 10, dt: 0.5, times: null });
    expect([...read.values]).toEqual([1, Number.NaN, -2.5]);
  });

  it('may answer a trial: what it is does not change by that, and a mark that cannot be read harms nothing', () => {
    const fields = { channel: 'c', seq: 0, t0: 1, dt: 1, values: [1, 2] };
    const plain = frame(JSON.stringify(fields));
    expect(plain.mark).toBeNull();
    const marked = (mark: object) => frame(JSON.stringify({ ...fields, ...mark }));
    const answer = marked({ trial: 'x', sentAt: '1970-01-01T00:00:02.5Z' });
    expect(answer).toEqual({ ...plain, mark: { trial: 'x', sentAt: 2.5 } });
    expect(marked({ trial: 'x' }).mark).toEqual({ trial: 'x', sentAt: null });
    expect(marked({ trial: 'x', sentAt: 'soon' }).mark).toEqual({ trial: 'x', sentAt: null });
    expect(marked({ trial: 'x', sentAt: [] }).mark).toEqual({ trial: 'x', sentAt: null });
    for (const trial of [7, '', 'x'.repeat(101), null]) expect(marked({ trial })).toEqual(plain);
  });

  it('is the same from JSON, CBOR arrays and CBOR typed arrays, its digest too', () => {
    const text = frame('{"channel":"c","seq":0,"t0":1,"dt":1,"values":[1,null,3]}');
    const fields = { channel: 'c', seq: 0, t0: 1, dt: 1 };
    const list = frame(encoder.encode({ ...fields, values: [1, null, 3] }));
    const typed = frame(
      encoder.encode({ ...fields, values: Float64Array.of(1, Number.POSITIVE_INFINITY, 3) }),
    );
    expect(list).toEqual(text);
    expect(typed).toEqual(text);
  });

  it('has another digest when a value or a time differs', () => {
    const digests = ['[1,2]', '[1,3]', '[2,1]', '[1,2,0]'].map(
      (values) => frame(`{"channel":"c","t0":1,"dt":1,"values":${values}}`).digest,
    );
    digests.push(frame('{"channel":"c","t0":2,"dt":1,"values":[1,2]}').digest);
    digests.push(frame('{"channel":"c","t":[1,2],"values":[1,2]}').digest);
    expect(new Set(digests).size).toBe(6);
  });

  // RFC 8746, section 2.1: tag numbers 64 to 87; the bytes are written out by hand
  it.each([
    ['uint8', 64, [1, 255], [1, 255]],
    ['uint16 big-endian', 65, [0x01, 0x02], [258]],
    ['uint32 big-endian', 66, [0, 0, 1, 0], [256]],
    ['uint64 big-endian', 67, [0, 0, 0, 0, 0, 0, 1, 1], [257]],
    ['uint8 clamped', 68, [7], [7]],
    ['uint16 little-endian', 69, [0x01, 0x02], [513]],
    ['uint32 little-endian', 70, [0, 1, 0, 0], [256]],
    ['uint64 little-endian', 71, [1, 1, 0, 0, 0, 0, 0, 0], [257]],
    ['sint8', 72, [0xff], [-1]],
    ['sint16 big-endian', 73, [0xff, 0xfe], [-2]],
    ['sint32 big-endian', 74, [0xff, 0xff, 0xff, 0xfd], [-3]],
    ['sint64 big-endian', 75, [0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xfc], [-4]],
    ['sint16 little-endian', 77, [0xfe, 0xff], [-2]],
    ['sint32 little-endian', 78, [0xfd, 0xff, 0xff, 0xff], [-3]],
    ['sint64 little-endian', 79, [0xfc, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff, 0xff], [-4]],
    ['float16 big-endian', 80, [0x3e, 0x00, 0x7e, 0x00], [1.5, Number.NaN]],
    ['float32 big-endian', 81, [0x3f, 0xc0, 0, 0], [1.5]],
    ['float64 big-endian', 82, [0x3f, 0xf8, 0, 0, 0, 0, 0, 0], [1.5]],
    ['float16 little-endian', 84, [0x00, 0x3e, 0x00, 0xfc], [1.5, Number.NaN]],
    ['float32 little-endian', 85, [0, 0, 0xc0, 0x3f], [1.5]],
    ['float64 little-endian', 86, [0, 0, 0, 0, 0, 0, 0xf8, 0x3f], [1.5]],
  ])('may hold an RFC 8746 typed array of %s', (_kind, tag, bytes, expected) => {
    expect([...frame(tagged(tag, bytes)).values]).toEqual(expected);
  });

  it('is a copy, never a view of the message', () => {
    const message = tagged(86, [0, 0, 0, 0, 0, 0, 0xf8, 0x3f]);
    const { values } = frame(message);
    message.fill(0);
    expect([...values]).toEqual([1.5]);
  });

  it('may carry its times, as numbers or RFC 3339', () => {
    expect([...frame('{"channel":"c","t":[1,1.5,4],"values":[1,2,3]}').times!]).toEqual([1, 1.5, 4]);
    const spelt = frame(
      '{"channel":"c","t":["1970-01-01T00:00:10Z","1970-01-01T00:00:10.5Z"],"values":[1,2]}',
    );
    expect([...spelt.times!]).toEqual([10, 10.5]);
    expect(frame('{"channel":"c","t0":"1970-01-01T00:01:00Z","dt":1,"values":[1]}').t0).toBe(60);
  });
});

describe('a message that cannot be used', () => {
  it.each([
    ['NOT_JSON', '{"channel":'],
    ['NOT_CBOR', Uint8Array.of(0xa1, 0x61)],
    ['NOT_CBOR', Uint8Array.of(0x9b, 0x00, 0x00, 0x0f, 0xff, 0xff, 0xff, 0xff, 0xff)],
    ['NOT_A_FRAME', '[1,2]'],
    ['NOT_A_FRAME', 'null'],
    ['NOT_A_FRAME', { values: [1] }],
    ['NOT_A_FRAME', { channel: '../x', values: [1] }],
    ['NOT_A_FRAME', { channel: 'c', seq: -1, values: [1] }],
    ['NOT_A_FRAME', { channel: 'c', dt: 0, values: [1] }],
    ['BAD_VALUES', { channel: 'c', dt: 1 }],
    ['BAD_VALUES', { channel: 'c', dt: 1, values: [] }],
    ['BAD_VALUES', { channel: 'c', dt: 1, values: '1,2' }],
    ['BAD_TIMES', { channel: 'c', t: [1, 1], values: [1, 2] }],
    ['BAD_TIMES', { channel: 'c', t: [1, null], values: [1, 2] }],
    ['BAD_TIMES', { channel: 'c', t: [1], values: [1, 2] }],
    ['BAD_TIMES', { channel: 'c', t: [1, 2], t0: 1, dt: 1, values: [1, 2] }],
    ['BAD_TIMES', { channel: 'c', t0: 'yesterday', dt: 1, values: [1] }],
    ['BAD_TIMES', { channel: 'c', t0: 1, values: [1, 2] }],
    ['BAD_TIMES', { channel: 'c', t0: 1e9, dt: 1e-12, values: [1, 2] }],
    ['TOO_LARGE', { channel: 'c', dt: 1, values: new Array(1001).fill(0) }],
    ['BAD_HELLO', { hello: 2, run: 'r', channels: [{ channel: 'c' }] }],
    ['BAD_HELLO', { hello: 1, run: 'r', channels: [] }],
    ['BAD_HELLO', { hello: 1, run: 'r', channels: [{ channel: 'c' }, { channel: 'c' }] }],
  ])('is a value with code %s and a sentence (%#)', (code, message) => {
    const found = fault(message);
    expect(found.code).toBe(code);
    expect(found.detail.length).toBeGreaterThan(10);
  });

  it('names the place and the value at fault', () => {
    expect(fault({ channel: 'c', dt: 1, values: [1, 2, 'three'] }).detail).toContain('values[2] is "three"');
    expect(fault({ channel: 'c', dt: 1, values: [1, [2]] }).detail).toContain('values[1] is an array');
    expect(fault({ channel: 'c', t: [1, 3, 2], values: [1, 2, 3] }).detail).toContain(
      't[2] = 2 is not after t[1] = 3',
    );
    expect(fault({ channel: 'c', t0: 1.7e12, dt: 1, values: [1] }).detail).toContain('milliseconds?');
  });

  it('still names its channel and number, so that it can count as consumed', () => {
    expect(fault({ channel: 'c', seq: 4, dt: 1, values: ['x'] })).toMatchObject({ channel: 'c', seq: 4 });
  });

  it('does not bring deep nesting or keys of prototypes into the program', () => {
    expect(fault('['.repeat(100_000)).code).toBe('NOT_JSON');
    expect(fault(new Uint8Array(100_000).fill(0x81)).code).toBe('NOT_CBOR');
    frame('{"__proto__":{"polluted":1},"channel":"c","dt":1,"values":[1]}');
    expect(({} as { polluted?: number }).polluted).toBeUndefined();
  });
});
