import assert from "node:assert/strict";
import { Float64, Int32, RecordBatch, Table, tableToIPC, Utf8, vectorFromArray } from "apache-arrow";
import fc from "fast-check";
import { Table as WasmTable, writeParquet, WriterPropertiesBuilder } from "parquet-wasm";
import { KnownIds } from "../../../pipeline/ingest/known_ids.ts";
import { type WallRun, WallRuns } from "../../../pipeline/ingest/wall_runs.ts";
import { ingestOne, type Row } from "./folder.ts";

const HEAD = "wafer,die,guide,position_um\n";

/** A guide's runs in short: first and last line, positions, rows kept aside. */
const short = (rows: Row[]) =>
  rows.map((row) => [
    row["guide_id"],
    row["source_line"],
    row["source_line_last"],
    [...row["positions_um"] as Iterable<number>],
    row["quarantined"],
  ]);

Deno.test("walls of a guide are packed into one row", async () => {
  const { rows, counts } = await ingestOne(
    "walls.csv",
    `${HEAD}K07-1,05,g01,4.5\nK07-1,05,g01,9\nK07-1,05,g02,4\nK07-1,05,g02,8.5\n`,
  );
  assert.deepEqual(counts, [4, 4, 0]);
  assert.deepEqual(short(rows), [["K07-1/05/g01", 2, 3, [4.5, 9], 0], ["K07-1/05/g02", 4, 5, [4, 8.5], 0]]);
});

Deno.test("a wall outside the guide, repeated or out of order is kept aside and counted against its guide", async () => {
  const at = (um: number | string) => `K07-1,05,g01,${um}\n`;
  const { rows, quarantine, counts } = await ingestOne(
    "walls.csv",
    HEAD + [0, 5, 5, 10, 7, 15, 20000, 19999.5, "x"].map(at).join(""),
  );
  assert.deepEqual(counts, [9, 4, 5]);
  assert.deepEqual(quarantine.map((row) => [row["source_line"], row["value"]]), [
    [2, "0"],
    [4, "5"],
    [6, "7"],
    [8, "20000"],
    [10, "x"],
  ]);
  assert.match(String(quarantine[1]!["reason"]), /repeats the one before/);
  assert.match(String(quarantine[2]!["reason"]), /out of order: the guide already has one at 10 µm/);
  assert.match(String(quarantine[3]!["reason"]), /outside the guide \(0…20000 µm/);
  assert.deepEqual(short(rows), [
    ["K07-1/05/g01", 3, 3, [5], 2],
    ["K07-1/05/g01", 5, 5, [10], 3],
    ["K07-1/05/g01", 7, 7, [15], 4],
    ["K07-1/05/g01", 9, 9, [19999.5], 5],
  ]);
});

Deno.test("a row that does not say whose wall it is counts against the guides before and after it", async () => {
  const { rows } = await ingestOne(
    "walls.csv",
    `${HEAD}K07-1,05,g01,4\nbroken\nK07-1,05,g02,4\nK07-1,06,g01,4\n`,
  );
  assert.deepEqual(short(rows).map((r) => [r[0], r[4]]), [
    ["K07-1/05/g01", 1],
    ["K07-1/05/g02", 1],
    ["K07-1/06/g01", 0],
  ]);
});

Deno.test("a wall under a misspelt guide counts against the guide that was meant, also after its last run", async () => {
  const { rows } = await ingestOne("walls.csv", `${HEAD}K07-1,05,g01,4\nK07-1,05,g02,4\nK07-1,5,g1,8\n`);
  assert.deepEqual(short(rows), [
    ["K07-1/05/g01", 2, 2, [4], 0],
    ["K07-1/05/g02", 3, 3, [4], 0],
    ["K07-1/05/g01", 4, 4, [], 1],
  ]);
});

Deno.test("a wall of a guide that is not on the mask counts against a guide only in the middle of its walls", async () => {
  const file =
    `${HEAD}K07-1,77,g01,2\nK07-1,05,g01,4\nK07-1,77,g01,6\nK07-1,05,g01,8\nK07-1,05,g02,4\nK07-1,77,g01,9\n`;
  const { rows, quarantine } = await ingestOne("walls.csv", file);
  assert.deepEqual(short(rows).map((r) => [r[0], r[4]]), [
    ["K07-1/05/g01", 1],
    ["K07-1/05/g01", 1],
    ["K07-1/05/g02", 0],
  ]);
  assert.equal(quarantine.length, 3);
});

Deno.test("a wall needs a guide: those of a whole die are kept aside", async () => {
  const { quarantine } = await ingestOne("walls.csv", `${HEAD}K07-1,05,,4\n`);
  assert.deepEqual([quarantine[0]!["column"], quarantine[0]!["reason"]], ["guide", "the cell is empty"]);
});

const runsOf = (walls: readonly (readonly [number, number | null])[]): WallRun[] => {
  const known = new KnownIds(["W"]);
  for (const guide of ["a", "b"]) {
    known.addGuide({
      wafer: "W",
      die: "1",
      guide,
      x_mm: 0,
      y_mm: 0,
      group: null,
      width_um: 1,
      period_um: 1,
      length_mm: 0.1,
      poled_from_mm: 0,
      poled_length_mm: 0,
    });
  }
  const runs: WallRun[] = [];
  const packer = new WallRuns(known, (run) => runs.push(run));
  const guides = [...known.guides()];
  walls.forEach(([guide, position], line) => {
    if (position === null) packer.bad(guides[guide]!, line);
    else packer.wall(guides[guide]!, position, line, null, null);
  });
  packer.end();
  return runs;
};

Deno.test("packing loses no wall: unpacked, every line is where it was, and counts add up", () => {
  const wall = fc.tuple(
    fc.integer({ min: 0, max: 1 }),
    fc.option(fc.integer({ min: -5, max: 120 }), { freq: 8 }),
  );
  fc.assert(fc.property(fc.array(wall, { maxLength: 60 }), (walls) => {
    const last = [0, 0];
    const bad = [0, 0];
    const expected = walls.flatMap(([guide, position], line) => {
      if (position === null || position <= last[guide]! || position >= 100) {
        bad[guide]!++;
        return [];
      }
      last[guide] = position;
      return [[guide, line, position]];
    });
    const runs = runsOf(walls);
    const unpacked = runs.flatMap((run) =>
      [...run.positions_um].map((position, k) => [run.guide.index, run.line + k, position])
    );
    assert.deepEqual(unpacked.sort((a, b) => a[1]! - b[1]!), expected);
    for (const guide of [0, 1]) {
      const counts = runs.filter((run) => run.guide.index === guide).map((run) => run.quarantined);
      assert.equal(Math.max(0, ...counts), bad[guide]);
    }
  }));
});

Deno.test("a hundred thousand walls come out as they went in, over all batches and chunks of the file", async () => {
  const each = 20_000;
  const guides = ["05,g01", "05,g02", "05,g12", "06,g01", "06,g02"];
  const text = guides.map((g) =>
    Array.from({ length: each }, (_, k) => `K07-1,${g},${(k + 1) * 0.5}\n`).join("")
  );
  const { rows, counts } = await ingestOne("walls.csv", HEAD + text.join(""));
  assert.deepEqual(counts, [5 * each, 5 * each, 0]);
  assert.deepEqual(rows.map((row) => row["source_line"]), guides.map((_, i) => 2 + i * each));
  for (const row of rows) {
    const positions = [...row["positions_um"] as Iterable<number>];
    assert.ok(positions.length === each && positions.every((um, k) => um === (k + 1) * 0.5));
  }
});

/** Parquet bytes of walls, in row groups of `group` rows. */
function parquet(
  columns: Record<string, unknown[]>,
  group = 3,
  ids: "text" | "number" | "dictionary" = "text",
): Uint8Array {
  const table = new Table(Object.fromEntries(
    Object.entries(columns).map(([name, values]) => [
      name,
      name === "position_um"
        ? vectorFromArray(values as number[], new Float64())
        : ids === "number"
        ? vectorFromArray(values as number[], new Int32())
        : ids === "dictionary"
        ? vectorFromArray(values as string[])
        : vectorFromArray(values as string[], new Utf8()),
    ]),
  ));
  assert.ok(table.batches[0] instanceof RecordBatch);
  const wasm = WasmTable.fromIPCStream(tableToIPC(table, "stream"));
  return writeParquet(wasm, new WriterPropertiesBuilder().setMaxRowGroupSize(group).build());
}

const WALLS = {
  wafer: Array(8).fill("K07-1"),
  die: ["05", "05", "05", "05", "05", "5", "06", "06"],
  guide: ["g01", "g01", "g01", "g01", "g02", "g02", "g01", "g01"],
  position_um: [4, 8, null, 12, 4, 8, 4, 30000],
};

Deno.test("walls come as Parquet as well, across row groups, with the row in place of the line", async () => {
  for (const ids of ["text", "dictionary"] as const) {
    const { rows, quarantine, counts } = await ingestOne("walls.parquet", parquet(WALLS, 3, ids));
    assert.deepEqual(counts, [8, 5, 3]);
    assert.deepEqual(short(rows), [
      ["K07-1/05/g01", 1, 2, [4, 8], 1],
      ["K07-1/05/g01", 4, 4, [12], 1],
      ["K07-1/05/g02", 5, 5, [4], 1],
      ["K07-1/06/g01", 7, 7, [4], 1],
    ]);
    assert.deepEqual(
      quarantine.map((row) => [row["source_line"], row["column"], row["value"], row["wanted"]]),
      [
        [3, "position_um", "", "a number above 0"],
        [6, "die", "5", '"05"'],
        [8, "position_um", "30000", "a position between 0 and 20000 µm"],
      ],
    );
  }
});

Deno.test("the same walls give the same rows from CSV and from Parquet", async () => {
  const csv = WALLS.wafer.map((wafer, i) =>
    `${wafer},${WALLS.die[i]},${WALLS.guide[i]},${WALLS.position_um[i] ?? ""}\n`
  );
  const a = await ingestOne("walls.csv", HEAD + csv.join(""));
  const b = await ingestOne("walls.parquet", parquet(WALLS));
  assert.deepEqual(a.counts, b.counts);
  assert.deepEqual(
    short(a.rows).map((row) => [row[0], row[3], row[4]]),
    short(b.rows).map((row) => [row[0], row[3], row[4]]),
  );
  assert.deepEqual(a.quarantine.map((row) => row["value"]), b.quarantine.map((row) => row["value"]));
});

Deno.test("a truncated or foreign Parquet file, and one with numbers for ids, is refused", async () => {
  const whole = parquet(WALLS);
  for (
    const bytes of [
      whole.slice(0, whole.length / 2),
      new TextEncoder().encode("no parquet"),
      new Uint8Array(0),
    ]
  ) {
    await assert.rejects(ingestOne("walls.parquet", bytes), {
      name: "InputError",
      message: /^Cannot read readings\/walls\.parquet: it is no whole Parquet file \(.+\); export it again/,
    });
  }
  const torn = whole.slice();
  torn.fill(0x55, 4, 120); // pages of the first row group: the decoder itself aborts
  await assert.rejects(ingestOne("walls.parquet", torn), {
    name: "InputError",
    message: /no whole Parquet file/,
  });
  const numbers = parquet(
    {
      ...WALLS,
      wafer: WALLS.wafer.map(() => 1),
      die: WALLS.die.map(Number),
      guide: WALLS.guide.map(() => 1),
    },
    3,
    "number",
  );
  await assert.rejects(ingestOne("walls.parquet", numbers), {
    name: "InputError",
    message: /column "wafer" has type Int32, need text \(ids are text: 05 is not 5\)/,
  });
  const { position_um: _, ...without } = WALLS;
  await assert.rejects(ingestOne("walls.parquet", parquet(without)), {
    name: "InputError",
    message: /column "position_um" is missing/,
  });
});
