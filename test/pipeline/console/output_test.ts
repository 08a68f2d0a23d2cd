import assert from "node:assert/strict";
import { parse } from "csv-parse/sync";
import fc from "fast-check";
import {
  cellText,
  csvText,
  formatRows,
  jsonText,
  numberText,
  rowObjects,
} from "../../../pipeline/console/mod.ts";

Deno.test("CSV comes back from a CSV reader as it went in", () => {
  const text = fc.string({ unit: "grapheme" }).filter((t) => !/^[=+\-@\t\r\uFEFF]/.test(t));
  fc.assert(fc.property(fc.array(fc.tuple(text, text), { minLength: 1 }), (rows) => {
    const found = parse(csvText(["a", 'b "quoted", c'], rows), { relax_quotes: false });
    assert.deepEqual(found, [["a", 'b "quoted", c'], ...rows]);
  }));
});

Deno.test("CSV writes numbers in full and missing values as nothing", () => {
  assert.equal(
    csvText(["a", "b", "c", "d"], [[0.1 + 0.2, -3.5, null, NaN], [1e300, true, undefined, -Infinity]]),
    "a,b,c,d\n0.30000000000000004,-3.5,,\n1e+300,true,,-Infinity\n",
  );
});

Deno.test("text that a spreadsheet would run as a formula gets an apostrophe, a negative number does not", () => {
  const evil = ["=1+1", "+1", "-1", "@SUM(A1)", "\tx", "\rx"];
  const lines = parse(csvText(["v"], evil.map((text) => [text]))) as string[][];
  assert.deepEqual(lines.slice(1), evil.map((text) => [`'${text}`]));
  assert.equal(csvText(["=a"], [[-1]]), "'=a\n-1\n");
});

Deno.test("JSON never holds NaN or infinities, and keeps the order of the keys", () => {
  const text = jsonText({ z: NaN, a: [Infinity, -0, 1e-7], m: { "2": 1, "b": -Infinity } });
  assert.deepEqual(JSON.parse(text), { z: null, a: [null, 0, 1e-7], m: { "2": 1, b: null } });
  assert.ok(text.indexOf('"z"') < text.indexOf('"a"'));
  assert.equal(
    jsonText({ x: Float64Array.of(1, NaN), n: 5n, m: new Map([["k", 1]]) }, { indent: 0 }),
    '{"x":[1,null],"n":5,"m":{"k":1}}',
  );
  assert.equal(jsonText(2n ** 60n), '"1152921504606846976"');
});

Deno.test("rows as JSON lose no column, even of the same name", () => {
  assert.deepEqual(rowObjects(["a", "a", "a (2)"], [[1, 2, 3]]), [{ a: 1, "a (2)": 2, "a (2) (2)": 3 }]);
  assert.equal(formatRows("json", [{ title: "a" }], []), "[]\n");
  assert.deepEqual(JSON.parse(formatRows("json", [{ title: "a" }, { title: "b" }], [[NaN]])), [{
    a: null,
    b: null,
  }]);
});

Deno.test("numbers are shown with six digits, whole ones in full", () => {
  const cases: [number, string][] = [
    [0, "0"],
    [123456789, "123456789"],
    [0.1 + 0.2, "0.3"],
    [1582.123456, "1582.12"],
    [12345678.9, "12345679"],
    [-0.000012345678, "-0.0000123457"],
    [1e-9, "1e-9"],
    [NaN, "NaN"],
    [-Infinity, "-Infinity"],
  ];
  for (const [value, text] of cases) assert.equal(numberText(value), text);
  assert.equal(numberText(Math.PI, 3), "3.14");
});

Deno.test("cells of every kind become one line of text", () => {
  assert.equal(cellText(null), "");
  assert.equal(cellText(undefined), "");
  assert.equal(cellText(true), "true");
  assert.equal(cellText(12n), "12");
  assert.equal(cellText([1, null, "a\nb"]), '[1,null,"a\\nb"]');
  assert.equal(cellText("a\nb"), "a\\u000ab");
});
