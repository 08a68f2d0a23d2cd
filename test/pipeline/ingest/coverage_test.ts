import assert from "node:assert/strict";
import stringWidth from "string-width";
import { summariseCoverage } from "../../../pipeline/ingest/coverage.ts";
import { coverageText } from "../../../pipeline/ingest/coverage_text.ts";
import { KnownIds } from "../../../pipeline/ingest/known_ids.ts";
import { READING_KINDS } from "../../../shared/schemas/readings.ts";

/** Guides g1…gN on dies 1…M of some wafers. */
function known(wafers: readonly string[], dies: number, guides: number): KnownIds {
  const ids = new KnownIds(wafers);
  for (const wafer of wafers) {
    for (let d = 1; d <= dies; d++) {
      for (let g = 1; g <= guides; g++) {
        const problem = ids.addGuide({
          wafer,
          die: `${d}`,
          guide: `g${g}`,
          x_mm: 0,
          y_mm: 0,
          group: null,
          width_um: 7,
          period_um: 9,
          length_mm: 20,
          poled_from_mm: 0,
          poled_length_mm: 18,
        });
        assert.equal(problem, null);
      }
    }
  }
  return ids;
}

Deno.test("coverage counts guides, whole dies and whole wafers, each unit once", () => {
  const covered = [
    { kind: "cutback", scope: "guide", unit: "W/1/g1" },
    { kind: "cutback", scope: "guide", unit: "W/1/g1" },
    { kind: "cutback", scope: "guide", unit: "W/1/g2" },
    { kind: "cutback", scope: "die", unit: "W/2" },
    { kind: "modes", scope: "wafer", unit: "W" },
    { kind: "facets", scope: "coating_run", unit: "C1" },
    { kind: "facets", scope: "coating_run", unit: "X9" },
    { kind: "cutback", scope: "guide", unit: "W/9/g1" }, // of an older guides.csv
  ];
  const coverage = summariseCoverage(known(["W"], 2, 3), covered, new Set(["C1", "C2"]));
  assert.deepEqual(
    coverage.rows.map((row) => [row.unit, row.guides, row.cells.cutback, row.cells.modes]),
    [
      ["W/1", 3, { guides: 2, dies: 0, wafer: false }, { guides: 0, dies: 0, wafer: true }],
      ["W/2", 3, { guides: 0, dies: 1, wafer: false }, { guides: 0, dies: 0, wafer: true }],
    ],
  );
  assert.deepEqual([coverage.coatingsWithSpectrum, coverage.coatings], [1, 2]);
  assert.equal(
    coverageText(coverage).split("\n\n")[0],
    [
      "die  guides  cutback  modes",
      "W/1       3        2      w",
      "W/2       3        d      w",
      "    number of guides with readings; d: readings of a whole die; w: of the whole",
      "    wafer",
    ].join("\n"),
  );
});

Deno.test("more than forty dies are grouped by wafer", () => {
  const covered = [1, 2, 3].map((d) => ({ kind: "poling", scope: "guide", unit: `B/${d}/g1` }));
  const coverage = summariseCoverage(known(["A", "B"], 21, 2), covered, new Set());
  assert.deepEqual(
    coverage.rows.map((row) => [row.unit, row.guides, row.cells.poling.guides]),
    [["A", 42, 0], ["B", 42, 3]],
  );
});

Deno.test("the text is at most eighty columns wide, whatever the ids and counts", () => {
  const wafer = "晶".repeat(30) + "x".repeat(40);
  const covered = READING_KINDS.flatMap((kind) => [
    ...Array.from({ length: 12 }, (_, g) => ({ kind, scope: "guide", unit: `${wafer}/1/g${g + 1}` })),
    { kind, scope: "die", unit: `${wafer}/1` },
    { kind, scope: "wafer", unit: wafer },
  ]);
  const text = coverageText(summariseCoverage(known([wafer], 3, 12), covered, new Set()));
  for (const line of text.split("\n")) assert.ok(stringWidth(line) <= 80, `${stringWidth(line)}: ${line}`);
  for (const kind of READING_KINDS) assert.match(text, new RegExp(`^${kind} +(12 of 36 guides|0 of 0)`, "m"));
});
