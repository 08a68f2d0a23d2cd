import assert from "node:assert/strict";
import {
  type NeighbourSimilarity,
  neighbourSimilarity,
} from "../../../../models/decision/wafer/neighbours.ts";
import type { SiteValue } from "../../../../models/decision/wafer/site_fit.ts";
import { randomFrom } from "../../../../shared/random.ts";
import { assertClose } from "../../../assert_close.ts";
import { isAnswer, wafer } from "./sites.ts";

const grid = (n: number, value: (column: number, row: number) => number): SiteValue[] =>
  Array.from(
    { length: n * n },
    (_, i) => ({ x: i % n, y: Math.floor(i / n), value: value(i % n, Math.floor(i / n)) }),
  );

Deno.test("neighbourSimilarity() of a chessboard is −1", () => {
  // Every neighbour has the opposite value and all squares are equal: I = (n/S₀)·(−S₀)/n.
  const board = neighbourSimilarity(grid(6, (c, r) => (c + r) % 2), 1) as NeighbourSimilarity;
  assertClose(board.i, -1, { abs: 1e-12 });
  assert.deepEqual([board.dies, board.pairs], [36, 60]);
  assert.ok(board.z < -5 && board.p < 1e-6);
});

Deno.test("neighbourSimilarity() less the mean has the moments of Moran's statistic", () => {
  // P. A. P. Moran, Biometrika 37, 17 (1950), in the form of A. D. Cliff & J. K. Ord: E = −1/(n − 1),
  // E[I²] = (n²S₁ − nS₂ + 3S₀²)/(S₀²(n² − 1)), S₁ = 2·S₀ and S₂ = 4·Σ(neighbours²) for weights of 0 and 1.
  const random = randomFrom("moran");
  const sites = wafer(() => random.normal());
  const found = neighbourSimilarity(sites, 0.0101) as NeighbourSimilarity;
  const n = sites.length;
  const neighbours = sites.map((a) =>
    sites.filter((b) => a !== b && Math.hypot(a.x - b.x, a.y - b.y) <= 0.0101).length
  );
  const s0 = neighbours.reduce((s, k) => s + k, 0);
  const s2 = 4 * neighbours.reduce((s, k) => s + k * k, 0);
  const meanSquare = (n * n * 2 * s0 - n * s2 + 3 * s0 * s0) / (s0 * s0 * (n * n - 1));
  assert.equal(found.pairs, s0 / 2);
  assertClose(found.expected, -1 / (n - 1), { rel: 1e-10 });
  assertClose(found.sd, Math.sqrt(meanSquare - 1 / (n - 1) ** 2), { rel: 1e-10 });
});

Deno.test("neighbourSimilarity() has the mean, spread and false alarms it says, also beside a trend", () => {
  const random = randomFrom("unrelated");
  const runs = 1000;
  for (const less of ["mean", "trend"] as const) {
    let [sum, squares, alarms, last] = [0, 0, 0, { expected: 0, sd: 0 }];
    for (let k = 0; k < runs; k++) {
      const slope = less === "trend" ? 300 : 0;
      const found = neighbourSimilarity(
        wafer((x, y) => slope * (x + 10 * (x * x + y * y)) + random.normal()),
        0.0101,
        less,
      );
      assert.ok(isAnswer(found));
      last = found;
      sum += found.i;
      squares += found.i ** 2;
      if (found.p < 0.05) alarms++;
    }
    const mean = sum / runs;
    if (less === "mean") assertClose(mean, last.expected, { abs: 4 * last.sd / Math.sqrt(runs) }, less);
    if (less === "mean") assertClose(Math.sqrt(squares / runs - mean * mean), last.sd, { rel: 0.08 }, less);
    assertClose(alarms / runs, 0.05, { abs: 0.02 }, less);
  }
});

Deno.test("neighbourSimilarity() sees what neighbours share beside the trend, and does not take the trend for it", () => {
  const random = randomFrom("patches");
  const trend = (x: number, y: number) => 200 * x + 3000 * (x * x + y * y);
  const plain = wafer((x, y) => trend(x, y) + random.normal());
  assert.ok((neighbourSimilarity(plain, 0.0101) as NeighbourSimilarity).p < 1e-6);
  assert.ok((neighbourSimilarity(plain, 0.0101, "trend") as NeighbourSimilarity).p > 0.01);
  const wavy = wafer((x, y) =>
    trend(x, y) + 2 * Math.sin(x / 0.01) * Math.cos(y / 0.01) + 0.3 * random.normal()
  );
  const found = neighbourSimilarity(wavy, 0.0101, "trend") as NeighbourSimilarity;
  assert.ok(found.z > 3 && found.i > 0, `z = ${found.z}`);
});

Deno.test("neighbourSimilarity() refuses what it can't judge", () => {
  const reason = (r: object) => (r as { refused: string }).refused;
  assert.match(reason(neighbourSimilarity(grid(3, (c) => c), 1)), /at least 10 dies, found 9/);
  assert.match(reason(neighbourSimilarity(grid(4, () => 0.1), 1)), /do not differ/);
  assert.match(reason(neighbourSimilarity(grid(4, (c) => c), 0.5)), /within reach/);
  assert.match(reason(neighbourSimilarity(grid(4, (c) => c), 99)), /every die is a neighbour/);
  assert.match(reason(neighbourSimilarity(grid(4, (c) => 1 + c), 1, "trend")), /nothing is left/);
  assert.throws(() => neighbourSimilarity(grid(4, (c) => c), 0), RangeError);
});
