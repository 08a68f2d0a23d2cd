import assert from "node:assert/strict";
import { type GuideInputs, predictGuide } from "../../../models/decision/mod.ts";
import { restoredInputs } from "../../../models/decision/restored_inputs.ts";
import { spreadFactor } from "../../../models/decision/mismatch_draws.ts";
import { mismatch } from "../../../models/guides/mod.ts";
import { realiseMismatch, uniformGrating } from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import type { Figure } from "../../../shared/schemas/figures.ts";
import type { ThreeWaves } from "../../../shared/vocabulary.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, ktp, request, trait } from "./a_guide.ts";

// Type 0 along z, where Δβ is steep in wavelength and the acceptance is that of the grating.
const waves: ThreeWaves = {
  lambdaP: 791e-9,
  lambdaS: 1582e-9,
  lambdaI: 1582e-9,
  polP: "TM",
  polS: "TM",
  polI: "TM",
};
const geometry = { width_um: 3 };
const period = 2 * Math.PI / Math.abs(mismatch(ktp.index, waves, 45, geometry)) / ktp.expansion(45);
const none = (key: string) => trait(0, 0, key);
const arm = { loss: none("loss"), mode: { reason: "" }, facet: { state: "bare", basis: "die" } } as const;
const plain: GuideInputs = {
  ...guide,
  period,
  pumpLoss: none("pump"),
  signal: arm,
  idler: arm,
  poling: {
    from: "walls",
    basis: "measured",
    walls: uniformGrating({ start: guide.poledFrom, length: guide.poledLength, period }).walls,
  },
};
const spread = (sd: number, u = 0) => ({
  ...plain,
  mismatchSpread: {
    sd: { ...trait(sd, u, "sd"), basis: "lot" as const },
    correlationLength: 1e-3,
    scanned: null,
  },
});
const doubling = request({
  process: "second-harmonic",
  polarisations: { pump: "TM", signal: "TM", idler: "TM" },
  signal: { wavelength_nm: 1582, average_power_mw: 10 },
});
const size = { draws: 8, spectral: 8 };
const many = { draws: 128, spectral: 16 };

function predicted(of: GuideInputs, checked = doubling, draws = size) {
  const { figures, remarks } = predictGuide(ktp, checked, of, { recorded: null, size: draws });
  return { remarks, figure: (name: Figure) => figures.find((f) => f.figure === name)! };
}

/** |φ|² by plain midpoint sums over a guide with a realisation on it: its height, and its width in Δβ. */
function bruteForce(sd: number, draw: number) {
  const { poledFrom: start, poledLength: length } = guide;
  const { z, delta } = realiseMismatch(
    { start, length, sd, correlationLength: 1e-3 },
    randomFrom(`${guide.id}|sd|${draw}|0`),
  );
  const n = 8 * Math.round(length / period);
  const h = length / n;
  const K = 2 * Math.PI / period;
  let theta = 0;
  let knot = 0;
  const at = Array.from({ length: n }, (_, k) => {
    const x = start + (k + 0.5) * h;
    while (z[knot + 1]! < x) knot++;
    const here = delta[knot]! +
      (delta[knot + 1]! - delta[knot]!) * (x - z[knot]!) / (z[knot + 1]! - z[knot]!);
    theta += here * h;
    // Eight steps a period: the inverted half is the middle one.
    const sign = k % 8 >= 2 && k % 8 < 6 ? -1 : 1;
    return { x, phase: K * x + theta - here * h / 2, sign };
  });
  // Every midpoint's phasor is turned on from one Δβ of a grid to the next.
  const [low, step, count] = [-2400, 8, 601];
  const phasors = at.map((p) => {
    const phase = p.phase + low * p.x;
    return {
      re: p.sign * Math.cos(phase),
      im: p.sign * Math.sin(phase),
      c: Math.cos(step * p.x),
      s: Math.sin(step * p.x),
    };
  });
  const power = Float64Array.from({ length: count }, () => {
    let [re, im] = [0, 0];
    for (const p of phasors) {
      re += p.re;
      im += p.im;
      [p.re, p.im] = [p.re * p.c - p.im * p.s, p.re * p.s + p.im * p.c];
    }
    return (re * re + im * im) / (n * n);
  });
  const top = power.indexOf(Math.max(...power));
  const [a, b, c] = [power[top - 1]!, power[top]!, power[top + 1]!];
  const height = b - (a - c) ** 2 / (8 * (a - 2 * b + c));
  const half = (direction: number): number => {
    let k = top;
    while (power[k]! > height / 2) k += direction;
    const [outer, inner] = [power[k]!, power[k - direction]!];
    return step * (Math.abs(k - top) - (height / 2 - outer) / (inner - outer));
  };
  return { height, width: half(-1) + half(1) };
}

Deno.test("efficiency and acceptance under a spread are those of plain integrals over the same realisations", () => {
  const without = predicted(plain);
  const own = bruteForce(0, 0);
  // Eight midpoints a period make the ideal peak larger by (x/sin x)², x = π/8; in ratios that cancels.
  assertClose(own.height, (2 / Math.PI * (Math.PI / 8) / Math.sin(Math.PI / 8)) ** 2, { rel: 1e-3 });
  for (const sd of [150, 400]) {
    const found = predicted(spread(sd));
    const draws = Array.from({ length: size.spectral }, (_, k) => bruteForce(sd, k));
    const mean = (f: (d: typeof own) => number) => draws.reduce((s, d) => s + f(d), 0) / draws.length;
    const ratio = (name: Figure) => found.figure(name).mean! / without.figure(name).mean!;
    assertClose(ratio("efficiency_percent_per_w"), mean((d) => d.height) / own.height, { rel: 3e-3 });
    assertClose(ratio("acceptance_nm"), mean((d) => d.width) / own.width, { rel: 0.02 });
    assert.ok(found.figure("efficiency_percent_per_w").u! > 0);
  }
});

Deno.test("a spread of nothing changes nothing, and none moves the temperature of operation", () => {
  const without = predicted(plain);
  const zero = predicted(spread(0));
  const wide = predicted(spread(300, 60));
  for (const name of ["efficiency_percent_per_w", "acceptance_nm"] as const) {
    assertClose(zero.figure(name).mean!, without.figure(name).mean!, { rel: 1e-6 });
  }
  // Efficiency rests on the calculated phase matching besides, which is the platform's.
  assert.equal(wide.figure("acceptance_nm").basis, "lot");
  assert.equal(without.figure("acceptance_nm").basis, "measured");
  const temperature = (p: typeof wide) => p.figure("operating_temperature_c");
  assert.equal(temperature(wide).mean, temperature(without).mean);
  assert.equal(temperature(wide).u, temperature(without).u);
  assert.ok(
    wide.figure("efficiency_percent_per_w").mean! < 0.95 * without.figure("efficiency_percent_per_w").mean!,
  );
});

Deno.test("pairs lose their number and purity to a spread, with a grating that is inspected as with one that is not", () => {
  const pairs = request({
    process: "pair-generation",
    polarisations: { pump: "TE", signal: "TE", idler: "TM" },
    pump: { wavelength_nm: 791, fwhm_ps: 1, average_power_mw: 0.1, repetition_mhz: 76 },
    signal: { wavelength_nm: 1582 },
    idler: {},
  });
  const typeII = { ...plain, period: guide.period };
  const walls =
    uniformGrating({ start: guide.poledFrom, length: guide.poledLength, period: guide.period }).walls;
  for (const poling of [{ ...plain.poling, walls } as GuideInputs["poling"], guide.poling]) {
    const without = predicted({ ...typeII, poling }, pairs);
    const found = predicted({ ...spread(300), period: guide.period, poling }, pairs);
    const mean = (p: typeof found, name: Figure) => p.figure(name).mean!;
    // The peak loses a tenth and more, the side peaks of the kernel gain what it loses.
    assert.ok(mean(found, "efficiency_percent_per_w") < 0.95 * mean(without, "efficiency_percent_per_w"));
    assert.ok(mean(found, "pairs_per_pulse") < mean(without, "pairs_per_pulse"));
    assert.ok(found.figure("purity").u! > 2 * without.figure("purity").u!);
  }
});

Deno.test("a guide that was scanned is as wide in every draw as its scan, whatever a realisation would be", () => {
  const measured = 1.25; // times the width of the poled length
  const length = guide.poledLength * 1e3 / measured;
  const scanned = {
    ...spread(700, 150),
    mismatchSpread: {
      ...spread(700, 150).mismatchSpread,
      scanned: {
        waves,
        effectiveLength: trait(length, 0.01 * length, "length"),
        peakKept: trait(0.6, 0.02, "kept"),
      },
    },
  };
  const without = predicted(plain).figure("acceptance_nm");
  const free = predicted(spread(700, 150), doubling, many).figure("acceptance_nm");
  const asScanned = predicted(scanned, doubling, many);
  const found = asScanned.figure("acceptance_nm");
  const efficiency = (p: typeof asScanned) => p.figure("efficiency_percent_per_w").mean!;
  assertClose(efficiency(asScanned), 0.6 * efficiency(predicted(plain)), { rel: 0.05 });
  assertClose(found.mean!, measured * without.mean!, { rel: 0.02 });
  assert.ok(found.u! < 0.04 * found.mean! && free.u! > 1.5 * found.u!, `${found.u}, free ${free.u}`);
  assert.ok(free.mean! < found.mean!);
});

Deno.test("a spread goes to other processes by the parameter that would explain it", () => {
  const errors = (u: number) => [
    { parameter: "width_um" as const, trait: trait(0, u, "w") },
    { parameter: "titanium_nm" as const, trait: trait(100, 1, "t") },
  ];
  const scanned = { waves, effectiveLength: trait(15, 0.1, "l"), peakKept: trait(0.8, 0.1, "k") };
  const told = { sd: trait(100, 10, "sd"), correlationLength: 1e-3, scanned };
  // Slopes of the asked process are twice (width) and half (titanium) those of the scanned one.
  const slopes = (w: ThreeWaves) => (p: string) =>
    (p === "width_um" ? 4 : 10) * (w === waves ? 1 : p === "width_um" ? -2 : 0.5);
  const other: ThreeWaves = { ...waves, polP: "TE", polS: "TE" };
  const factor = (asked: ThreeWaves, u: number) =>
    spreadFactor(asked, told, { geometryErrors: u === 0 ? [] : errors(u) }, slopes);
  assert.deepEqual(factor(other, 5), { factor: 2, by: "width_um" });
  assert.deepEqual(factor(other, 0.1), { factor: 0.5, by: "titanium_nm" });
  assert.deepEqual(factor(other, 0), { factor: 2, by: "width_um" });
  const near = { ...waves, lambdaP: waves.lambdaP * 1.04 };
  assert.deepEqual(factor(near, 5), { factor: 1, by: null });
  assert.deepEqual(factor({ ...waves, lambdaP: waves.lambdaP * 1.06 }, 5), { factor: 2, by: "width_um" });
  assert.equal(spreadFactor(other, told, { geometryErrors: [] }, () => () => 0), null);
});

Deno.test("a guide whose poling is put right has no spread left, one whose losses are has", () => {
  const aims = { platform: { targets: {}, defaults: {} }, designWidth_um: 3 };
  assert.equal(restoredInputs(spread(300), ["poling"], doubling, aims).mismatchSpread, null);
  assert.equal(restoredInputs(spread(300), ["loss"], doubling, aims).mismatchSpread!.sd.value, 300);
});
