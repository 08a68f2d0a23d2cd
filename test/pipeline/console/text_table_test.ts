import assert from "node:assert/strict";
import fc from "fast-check";
import stringWidth from "string-width";
import { type Cell, textTable, wrap } from "../../../pipeline/console/mod.ts";

const lines = (text: string) => text.slice(0, -1).split("\n");
const titles = (...names: string[]) => names.map((title) => ({ title }));

Deno.test("numbers stand to the right, texts to the left, under a rule", () => {
  const table = textTable(titles("die", "probability", "limited by"), [
    ["K07-1/05", 0.912345678, "purity"],
    ["K07-1/12", 1, null],
    ["K07-1/13", null, "heralding_signal"],
  ]);
  assert.equal(
    table,
    [
      "die       probability  limited by",
      "────────  ───────────  ────────────────",
      "K07-1/05     0.912346  purity",
      "K07-1/12            1",
      "K07-1/13               heralding_signal",
      "",
    ].join("\n"),
  );
});

Deno.test("a table without rows still shows its headings", () => {
  assert.equal(textTable(titles("die", "guide"), []), "die  guide\n───  ─────\n");
});

Deno.test("text that is too long ends in an ellipsis; a number is never cut", () => {
  const table = textTable(titles("statement", "n"), [["x".repeat(200), 1234567.891]], { width: 40 });
  assert.deepEqual(lines(table).map((line) => stringWidth(line)), [40, 40, 40]);
  assert.match(table, /x… {2}1234568/);
});

Deno.test("a column to be kept whole is not cut: others give way", () => {
  const columns = [{ title: "guide", whole: true }, { title: "decision" }, { title: "limit" }];
  const text = textTable(columns, [["R08-1/01/g02", "accept", "heralding_signal"]], { width: 32 });
  assert.match(text, /^R08-1\/01\/g02 {2}accept/m);
  assert.ok(text.split("\n").every((line) => line.length <= 32), text);
});

Deno.test("columns that do not fit are named below, not squeezed into other numbers", () => {
  const names = Array.from({ length: 12 }, (_, i) => `figure_${i}`);
  const row = names.map((_, i) => 123456789 + i);
  const table = textTable(titles(...names), [row], { width: 60 });
  for (const line of lines(table)) assert.ok(stringWidth(line) <= 60, line);
  assert.match(table, /not shown for lack of width: .*figure_11/s);
  for (const number of lines(table)[2]!.split(/ +/)) assert.ok(row.includes(Number(number)), number);
});

Deno.test("no line is wider than the terminal, whatever is in the cells", () => {
  const cell: fc.Arbitrary<Cell> = fc.oneof(
    fc.string({ unit: "grapheme", maxLength: 60 }),
    fc.string({ unit: "binary", maxLength: 20 }),
    fc.double(),
    fc.integer(),
    fc.boolean(),
    fc.constant(null),
    fc.array(fc.integer(), { maxLength: 8 }),
  );
  const property = (columns: string[], cells: Cell[][], width: number) => {
    const rows = cells.map((row) => columns.map((_, i) => row[i % row.length] ?? null));
    const table = textTable(titles(...columns), rows, { width });
    for (const line of lines(table)) {
      assert.ok(stringWidth(line) <= width, `${stringWidth(line)} > ${width}: ${line}`);
    }
    assert.ok(lines(table).length >= rows.length + 2, "one line per row");
  };
  const columns = fc.array(fc.string({ maxLength: 30 }), { minLength: 1, maxLength: 9 });
  const rows = fc.array(fc.array(cell, { minLength: 1, maxLength: 9 }), { maxLength: 6 });
  fc.assert(fc.property(columns, rows, fc.integer({ min: 30, max: 120 }), property));
});

Deno.test("control and direction marks of a file are shown, not obeyed", () => {
  const table = textTable(titles("name"), [["\x1b[2Jgone\u202e\r\nsecond"]]);
  assert.ok(!textTable(titles("a\x1b[2J"), []).includes("\x1b"));
  assert.equal(lines(table)[2], "\\u001b[2Jgone\\u202e\\u000d\\u000asecond");
});

Deno.test("colour only makes the headings bold, and only when asked for", () => {
  assert.ok(!textTable(titles("die"), [["a"]]).includes("\x1b"));
  assert.ok(textTable(titles("die"), [["a"]], { colour: true }).startsWith("\x1b[1mdie\x1b[22m\n"));
});

Deno.test("wrap() keeps a number with its % and its u", () => {
  const broken = wrap("takes away 80 % of the doubt, 471 ± 12 %/W, the rest", 14);
  assert.ok(broken.every((line) => line.length <= 14), broken.join("|"));
  assert.deepEqual(broken, ["takes away", "80 % of the", "doubt,", "471 ± 12 %/W,", "the rest"]);
});

Deno.test("wrap() breaks at spaces and loses no word", () => {
  const text = "one two three four five six seven";
  const wrapped = wrap(text, 12);
  assert.ok(wrapped.every((line) => line.length <= 12));
  assert.equal(wrapped.join(" "), text);
});
