// The twin of sim/wire: reads every golden packet, and writes the same bytes again.
import assert from "node:assert/strict";
import { readdirSync, readFileSync } from "node:fs";
import { test } from "node:test";
import { column, decode, encode } from "../../src/engine/wire";

const folder = `${process.env["ROOT"]}/sim/wire/testdata`;
const read = (name: string): Uint8Array<ArrayBuffer> => Uint8Array.from(readFileSync(`${folder}/${name}`));

test("golden packets decode and encode to the same bytes", () => {
  const names = readdirSync(folder).filter((n) => n.endsWith(".packet"));
  assert.equal(names.length, 6);
  for (const name of names) {
    const bytes = read(name);
    assert.deepEqual(encode(decode(bytes)), bytes, name);
  }
});

test("columns come as they are", () => {
  const p = decode(read("done.packet"));
  assert.equal(p.id, 4294967295);
  assert.deepEqual([...(column<Int32Array>(p, "targets") ?? [])], [0, 0, 1, -1, 2147483647]);
  assert.deepEqual([...(column<Float32Array>(p, "pull") ?? [])], [0.5, -1.25, Math.fround(3e-20)]);
  assert.equal(new TextDecoder().decode(column<Uint8Array>(p, "file")), "a,b\r\n");
  assert.deepEqual(p.body, { margin: null, members: 3 });
});

test("broken packets are refused", () => {
  const whole = read("done.packet");
  for (let n = 0; n < whole.length; n++) assert.throws(() => decode(whole.slice(0, n)), `${n} bytes`);
  const more = new Uint8Array(whole.length + 1);
  more.set(whole);
  assert.throws(() => decode(more), /left over/);
});
