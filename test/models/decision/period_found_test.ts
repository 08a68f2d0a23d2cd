import { deepEqual, equal, ok } from "node:assert/strict";
import {
  type CountedWindow,
  countingOffset,
  densityFromWindows,
  periodFromWalls,
  UNKNOWN_COUNTING,
} from "../../../models/decision/period_found.ts";
import { type Random, randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

/** Domains of width duty·period in a window at a random place; those that the window cuts are counted, or not. */
function counted(random: Random, length: number, ratio: number, cut: boolean, duty = 0.5): CountedWindow {
  const start = random.uniform();
  let domains = 0;
  for (let k = -1; k * ratio < start + length; k++) {
    const [from, to] = [k * ratio, (k + duty) * ratio];
    if (cut ? to > start && from < start + length : from >= start && to <= start + length) domains++;
  }
  return { domains, drawn: length };
}
const windowsOf = (random: Random, n: number, length: number, ratio: number, cut: boolean) =>
  Array.from({ length: n }, () => counted(random, length, ratio, cut));

Deno.test("densityFromWindows() holds what it promises, however domains at the ends are counted", () => {
  const random = randomFrom("windows");
  for (const cut of [true, false]) {
    for (const ratio of [1, 0.97]) {
      let [beyond, sum] = [0, 0];
      const trials = 400;
      for (let k = 0; k < trials; k++) {
        const windows = windowsOf(random, 12, 40 + 30 * random.uniform(), ratio, cut);
        const { density, u } = densityFromWindows(windows)!;
        sum += u;
        if (Math.abs(density - (1 / ratio - 1)) > 3 * u) beyond++;
      }
      // The worst habit, ±½, is at √3 of the offset's u, and the rest is the windows' chance.
      ok(beyond / trials < 0.01, `cut ${cut}, ratio ${ratio}: ${beyond} of ${trials}`);
      ok(sum / trials < 0.0085, `u ${sum / trials}`);
    }
  }
});

Deno.test("densityFromWindows() tells habit from period where windows differ in length", () => {
  const random = randomFrom("lengths");
  const windows = [...windowsOf(random, 40, 20.3, 0.98, true), ...windowsOf(random, 40, 150.7, 0.98, true)];
  const { density, u } = densityFromWindows(windows)!;
  assertClose(density, 1 / 0.98 - 1, { abs: 3 * u });
  const alike = densityFromWindows(windowsOf(random, 80, 85.5, 0.98, true))!;
  ok(u < 0.4 * alike.u, `${u} from different lengths, ${alike.u} from one`);
  equal(densityFromWindows([{ domains: 19, drawn: 19 }]), null);
});

Deno.test("countingOffset() learns the habit from all groups, and is not talked into it by one that is off", () => {
  const random = randomFrom("habit");
  const groups = Array.from({ length: 6 }, () => windowsOf(random, 16, 57.4, 1, true));
  const { offset, u } = countingOffset(groups);
  assertClose(offset, 0.5, { abs: 3 * u }, "a domain is half a period wide, and counted when cut");
  ok(u < 0.12, `u ${u}`);
  const one = countingOffset([...groups.slice(1), windowsOf(random, 16, 57.4, 0.95, true)]);
  assertClose(one.offset, 0.5, { abs: 0.2 });
  // Half of them off: nothing is known.
  const half = groups.map((g, k) => k % 2 === 0 ? g : windowsOf(random, 16, 57.4, 0.95, true));
  deepEqual(countingOffset(half), UNKNOWN_COUNTING);
  deepEqual(countingOffset(groups.slice(0, 3)), UNKNOWN_COUNTING);
  const most = groups.map((g, k) => k < 2 ? g : windowsOf(random, 16, 57.4, 0.95, true));
  deepEqual(countingOffset(most), UNKNOWN_COUNTING, "three domains too many are no habit");
});

Deno.test("a period 1 % off is seen in a few dozen windows of 60 domains, and none is seen where there is none", () => {
  const random = randomFrom("pooled");
  let [found, falsely] = [0, 0];
  const trials = 300;
  for (let k = 0; k < trials; k++) {
    const others = Array.from({ length: 7 }, () => windowsOf(random, 24, 60.5, 1, k % 2 === 0));
    const out = (ratio: number) => {
      const own = windowsOf(random, 24, 60.5, ratio, k % 2 === 0);
      const { density, u } = densityFromWindows(own, countingOffset([...others, own]))!;
      return Math.abs(1 / (1 + density) - 1) > Math.max(0.002, 4 * u);
    };
    if (out(1.012)) found++;
    if (out(1)) falsely++;
  }
  ok(found > 0.8 * trials, `${found} of ${trials}`);
  equal(falsely, 0);
});

/** Walls of a grating with jitter on every wall, or walls that wander, and some domains missing. */
function wallsOf(random: Random, { period = 17.3, n = 600, jitter = 0.3, wander = 0, missing = 0.09 } = {}) {
  const walls: number[] = [];
  let drift = 0;
  for (let k = 0; k < n; k++) {
    drift += wander * random.normal();
    if (random.uniform() < missing) continue;
    const duty = 0.4 + 0.2 * k / n;
    walls.push(
      period * (k - duty / 2) + drift + jitter * random.normal(),
      period * (k + duty / 2) + drift + jitter * random.normal(),
    );
  }
  return walls;
}

Deno.test("periodFromWalls() is right to a few parts in 10⁵ in spite of missing domains and a drifting duty", () => {
  const random = randomFrom("walls");
  let beyond = 0;
  for (let k = 0; k < 200; k++) {
    const { period, u } = periodFromWalls(wallsOf(random))!;
    if (Math.abs(period - 17.3) > 2 * u) beyond++;
    ok(u < 1e-4 * 17.3, `u ${u}`);
  }
  ok(beyond < 16, `${beyond} of 200 beyond 2 u`);
});

Deno.test("periodFromWalls() owns up to walls that wander together", () => {
  const random = randomFrom("wander");
  let beyond = 0;
  for (let k = 0; k < 200; k++) {
    const { period, u } = periodFromWalls(wallsOf(random, { jitter: 0.05, wander: 0.05 }))!;
    if (Math.abs(period - 17.3) > 4 * u) beyond++;
  }
  ok(beyond <= 6, `${beyond} of 200 beyond 4 u`);
  equal(periodFromWalls([1, 2, 3]), null);
  // No lattice: the median step, with a u of its own kind.
  const loose = periodFromWalls(Array.from({ length: 200 }, (_, k) => 10 * k + 6 * random.uniform()))!;
  assertClose(loose.period, 20, { abs: 4 * loose.u });
});
