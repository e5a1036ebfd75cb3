// The protocol between page, engine and stage; sim/wire is its twin.
//
// A packet is a length, a JSON head and raw little-endian columns:
//
//   uint32  length of the head in bytes
//   head    {"v": 1, "id": 7, "kind": "grow", "body": {...}, "columns": [{"name": "targets", "type": "i32", "length": 10}]}
//   padding with spaces inside the head to a multiple of 8, so that columns lie aligned
//   columns in order, each padded with zeros to a multiple of 8
//
// Non-finite numbers go as null. Seeds are uint32; digests and anything wider are strings. Leftover bytes are an error.

export const version = 1;

export type Data = Uint8Array | Int32Array | Float32Array;

export interface Column {
  name: string;
  data: Data;
}

export interface Packet {
  id: number;
  kind: string;
  body: unknown;
  columns: Column[];
}

interface ColumnHead {
  name: string;
  type: "u8" | "i32" | "f32";
  length: number;
}

interface Head {
  v: number;
  id: number;
  kind: string;
  body: unknown;
  columns: ColumnHead[];
}

const padded = (n: number): number => (n + 7) & ~7;

function headOf(c: Column): ColumnHead {
  const type = c.data instanceof Int32Array ? "i32" : c.data instanceof Float32Array ? "f32" : "u8";
  return { name: c.name, type, length: c.data.length };
}

/** Returns the packet's bytes. */
export function encode(p: Packet): Uint8Array<ArrayBuffer> {
  const head: Head = { v: version, id: p.id, kind: p.kind, body: p.body ?? {}, columns: p.columns.map(headOf) };
  let text = new TextEncoder().encode(JSON.stringify(head));
  const length = padded(4 + text.length) - 4;
  const size = p.columns.reduce((n, c) => n + padded(c.data.byteLength), 4 + length);
  const out = new Uint8Array(size);
  new DataView(out.buffer).setUint32(0, length, true);
  out.fill(0x20, 4, 4 + length);
  out.set(text, 4);
  let at = 4 + length;
  for (const c of p.columns) {
    out.set(new Uint8Array(c.data.buffer, c.data.byteOffset, c.data.byteLength), at);
    at += padded(c.data.byteLength);
  }
  return out;
}

/** Reads a packet; its columns are views into the bytes. */
export function decode(bytes: Uint8Array<ArrayBuffer>): Packet {
  if (bytes.length < 4) throw new Error(`wire: ${bytes.length} bytes are no packet`);
  const length = new DataView(bytes.buffer, bytes.byteOffset).getUint32(0, true);
  if (length > bytes.length - 4) throw new Error(`wire: the head should be ${length} bytes, ${bytes.length - 4} are there`);
  const head = JSON.parse(new TextDecoder().decode(bytes.subarray(4, 4 + length))) as Head;
  if (head.v !== version) throw new Error(`wire: version ${head.v}, this side speaks ${version}`);
  let at = bytes.byteOffset + 4 + length;
  const end = bytes.byteOffset + bytes.length;
  const columns = head.columns.map((h): Column => {
    const width = { u8: 1, i32: 4, f32: 4 }[h.type];
    if (!width) throw new Error(`wire: column "${h.name}" has the unknown type "${h.type}"`);
    if (at + padded(h.length * width) > end) throw new Error(`wire: column "${h.name}" is cut off`);
    const make = { u8: Uint8Array, i32: Int32Array, f32: Float32Array }[h.type];
    const data = new make(bytes.buffer, at, h.length);
    at += padded(h.length * width);
    return { name: h.name, data };
  });
  if (at < end) throw new Error(`wire: ${end - at} bytes left over`);
  return { id: head.id, kind: head.kind, body: head.body, columns };
}

export function column<T extends Data>(p: Packet, name: string): T | undefined {
  return p.columns.find((c) => c.name === name)?.data as T | undefined;
}
