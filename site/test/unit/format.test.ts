import assert from "node:assert/strict";
import { test } from "node:test";
import { csv } from "../../src/charts/figure";
import { count, number, percent, seconds, typed } from "../../src/words/format";

test("shares: whole from 10 %, one decimal from 1 %, two below", () => {
  assert.deepEqual([0.41, 0.0999, 0.0123, 0.00456, 0.00001, 0, 1].map(percent), ["41 %", "10 %", "1.2 %", "0.46 %", "< 0.01 %", "0 %", "100 %"]);
});

test("numbers", () => {
  assert.deepEqual([1.40505, 0.32, -0.131337, 12345, 3, 0, null, 1e-300, 2.5e7].map((x) => number(x)), ["1.41", "0.320", "−0.131", "12,345", "3", "0", "∞", "1.00 × 10^−300", "2.50 × 10^7"]);
  assert.equal(count(1234567), "1,234,567");
  assert.equal(typed(0.30000000000000004, 0.05), "0.3");
  assert.equal(typed(1.234567, 0.05), "1.234567");
  assert.equal(seconds(0.4), "1 s");
});

test("tables are RFC 4180", () => {
  assert.equal(csv({ columns: ["a", 'b "c"'], rows: [["x,y", 1], ["line\nbreak", 2]] }), 'a,"b ""c"""\r\n"x,y",1\r\n"line\nbreak",2\r\n');
});
