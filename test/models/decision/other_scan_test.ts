import { deepEqual, equal, ok } from "node:assert/strict";
import fc from "fast-check";
import { drawTraits, type MismatchBend } from "../../../models/decision/drawn_traits.ts";
import type { GuideInputs, OtherScan } from "../../../models/decision/mod.ts";
import { otherScanRemarks, tellingScan } from "../../../models/decision/other_scan.ts";
import type { GeometryParameter } from "../../../models/guides/mod.ts";
import { mean, standardDeviation } from "../../../shared/statistics.ts";
import type { ThreeWaves } from "../../../shared/vocabulary.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, trait } from "./a_guide.ts";

const waves: ThreeWaves = {
  lambdaP: 791e-9,
  lambdaS: 1582e-9,
  lambdaI: 1582e-9,
  polP: "TM",
  polS: "TM",
  polI: "TM",
};
const size = { draws: 4096, spectral: 16 };
const PARAMETERS = ["width_um", "titanium_nm"] as const;
type Slopes = Partial<Record<GeometryParameter, number>>;

const scanned = (
  offset: number,
  u: number,
  expected = { value: 0, u: 0 },
  over: Partial<OtherScan> = {},
) => ({
  waves,
  offset: { ...trait(offset, u, "scan"), basis: "measured" as const },
  expected,
  read: 0,
  shares: {},
  ...over,
});

/** A guide with errors of the given u, and its drawn offsets for given slopes of the asked (B) and the scanned process (A). */
function drawn(
  us: Slopes,
  [A, B]: readonly [Slopes, Slopes],
  otherScans: readonly OtherScan[],
  bends: { readonly A?: MismatchBend; readonly B?: MismatchBend } = {},
  draws = size,
) {
  const inputs: GuideInputs = {
    ...guide,
    geometryErrors: PARAMETERS.filter((p) => us[p] !== undefined)
      .map((parameter) => ({
        parameter,
        trait: trait(parameter === "width_um" ? 0 : 100, us[parameter]!, parameter),
      })),
    otherScans,
  };
  const slope = (p: GeometryParameter) => B[p] ?? 0;
  const told = tellingScan(inputs, () => ({ slope: (p) => A[p] ?? 0, bend: bends.A ?? (() => 0) }));
  return { ...drawTraits(inputs, slope, draws, bends.B ?? (() => 0), told), told, inputs, slope };
}
const column = (d: ReturnType<typeof drawn>, key: string) => d.columns.find((c) => c.key === key)!;
const covariance = (x: Float64Array, y: Float64Array) => {
  const [a, b] = [mean(x), mean(y)];
  return x.reduce((sum, v, k) => sum + (v - a) * (y[k]! - b), 0) / (x.length - 1);
};

Deno.test("of one parameter the draws have the mean and the variance of the posterior, and the offset follows them", () => {
  // Precisions add: 1/u² + S²/r, r = s² + u_A².
  const [u, SA, SB, d, r] = [0.1, 3000, -2000, 250, 120 ** 2 + 50 ** 2];
  const found = drawn({ width_um: u }, [{ width_um: SA }, { width_um: SB }], [
    scanned(300, 50, { value: 50, u: 120 }),
  ]);
  const variance = 1 / (1 / u ** 2 + SA ** 2 / r);
  const centre = variance * SA * d / r;
  const { narrowed } = column(found, "width_um");
  assertClose(mean(narrowed!), centre, { abs: 0.02 * Math.sqrt(variance) });
  assertClose(standardDeviation(narrowed!), Math.sqrt(variance), { rel: 0.03 });
  assertClose(found.nominalOffset, SB * centre, { rel: 1e-12 });
  assertClose(mean(found.offset), SB * centre, { abs: 0.02 * Math.abs(SB) * Math.sqrt(variance) });
  found.offset.forEach((x, k) => assertClose(x, SB * narrowed![k]!, { abs: 1e-9 }));
});

Deno.test("of two parameters the draws have the means, variances and the correlation of the posterior", () => {
  const us = { width_um: 0.08, titanium_nm: 1.5 };
  const [a, b] = [2500, 150];
  const r = 40 ** 2 + 10 ** 2;
  const found = drawn(us, [{ width_um: a, titanium_nm: b }, { width_um: 1800, titanium_nm: -60 }], [
    scanned(-180, 10, { value: 20, u: 40 }),
  ]);
  // Inverse of the summed precisions P⁻¹ + aaᵀ/r, by hand.
  const [h11, h22, h12] = [1 / us.width_um ** 2 + a * a / r, 1 / us.titanium_nm ** 2 + b * b / r, a * b / r];
  const det = h11 * h22 - h12 * h12;
  const [v11, v22, v12] = [h22 / det, h11 / det, -h12 / det];
  const means = [(v11 * a + v12 * b) * -200 / r, (v12 * a + v22 * b) * -200 / r];
  const [w, t] = [column(found, "width_um").narrowed!, column(found, "titanium_nm").narrowed!];
  assertClose(mean(w), means[0]!, { abs: 0.03 * Math.sqrt(v11) });
  assertClose(mean(t), 100 + means[1]!, { abs: 0.03 * Math.sqrt(v22) });
  assertClose(covariance(w, w), v11, { rel: 0.06 });
  assertClose(covariance(t, t), v22, { rel: 0.06 });
  assertClose(covariance(w, t) / Math.sqrt(v11 * v22), v12 / Math.sqrt(v11 * v22), { abs: 0.02 });
  // The columns that figures are explained by stay independent, with the scan as one of them.
  const columns = [
    column(found, "width_um"),
    column(found, "titanium_nm"),
    column(found, "scan|by the cross-section"),
  ];
  deepEqual(columns.map((c) => c.trait), ["width_error_um", "titanium_nm", "TM>TM+TM mismatch_offset_per_m"]);
  for (const x of columns) {
    for (const y of columns) {
      const expected = x === y ? x.u ** 2 : 0;
      assertClose(covariance(x.draws, y.draws) / (x.u * y.u), expected / (x.u * y.u), { abs: 0.05 });
    }
  }
});

Deno.test("a scan tells nothing by what does not move it, and nothing of what is known", () => {
  const scan = [scanned(500, 10)];
  const without = drawn({ width_um: 0.1 }, [{}, { width_um: 2000 }], []);
  for (
    const found of [
      drawn({ width_um: 0.1 }, [{ width_um: 0 }, { width_um: 2000 }], scan),
      drawn({ width_um: 0.1 }, [{ width_um: 900 }, { width_um: 2000 }], [
        scanned(500, 10, { value: 0, u: 0 }, { shares: { width_um: { felt: 1, own: 0 } } }),
      ]),
    ]
  ) {
    equal(found.told, null);
    deepEqual([found.offset, found.nominalOffset, found.columns], [without.offset, 0, without.columns]);
    ok(otherScanRemarks(found.inputs, found.told, found.slope)[0]!.endsWith("not used"));
  }
  const known = drawn({ width_um: 0 }, [{ width_um: 900 }, { width_um: 2000 }], scan);
  ok(known.told === null && known.offset.every((x) => x === 0));
  deepEqual(otherScanRemarks(without.inputs, null, without.slope), []);
});

Deno.test("a parameter that moves the scan alone takes part of its surprise", () => {
  const us = { width_um: 0.1, titanium_nm: 2 };
  const alone = drawn({ width_um: 0.1 }, [{ width_um: 1000 }, { width_um: 1000 }], [scanned(200, 10)]);
  const both = drawn(us, [{ width_um: 1000, titanium_nm: 50 }, { width_um: 1000 }], [scanned(200, 10)]);
  // Halves of nearly equal variances (100² each) against all of it.
  assertClose(alone.nominalOffset, 200 * 1e4 / (1e4 + 100), { rel: 1e-12 });
  assertClose(both.nominalOffset, 200 * 1e4 / (2e4 + 100), { rel: 1e-12 });
});

// Evenly over their range: arbitrary doubles would nearly all be next to 0.
const share = fc.integer({ min: 0, max: 100 }).map((x) => x / 100);
const slope = fc.integer({ min: -3000, max: 3000 });
const sd = fc.integer({ min: 1, max: 500 });

Deno.test("the u of the asked process never grows by a scan of another, whatever the scan", () => {
  const any = fc.record({
    a: slope,
    b: slope,
    c: slope,
    d: slope,
    s: sd,
    uA: sd,
    offset: slope,
    felt: share,
    own: share,
  });
  fc.assert(
    fc.property(any, ({ a, b, c, d, s, uA, offset, felt, own }) => {
      const us = { width_um: 0.1, titanium_nm: 0.2 };
      const slopes = [{ width_um: a, titanium_nm: b }, { width_um: c, titanium_nm: d }] as const;
      const shares = { width_um: { felt, own: own * felt } };
      const few = { draws: 1024, spectral: 16 };
      const scan = scanned(offset, uA, { value: 0, u: s }, { shares });
      const [free, held] = [[], [scan]].map((scans) =>
        standardDeviation(drawn(us, slopes, scans, {}, few).offset)
      );
      // Samples of 1024 draws hold a standard deviation to some 2 to 3 %.
      ok(held! <= 1.1 * free! + 1e-9, `${held} from ${free}`);
    }),
    { numRuns: 60 },
  );
});

Deno.test("what guides have in common is not told twice: the stated variance is never less than the mean square error", () => {
  // q = common + own; others' scans of weight W hold W·S·common; the prior of the calculation makes up for the rest.
  const any = fc.record({ S: slope, V: share, W: share, s: sd, uA: sd, asked: share });
  fc.assert(fc.property(any, ({ S, V, W, s, uA, asked }) => {
    const u = 0.1;
    const inScan = W * V;
    const told = tellingScan({
      geometryErrors: [{ parameter: "width_um", trait: trait(0, u, "w") }],
      otherScans: [scanned(0, uA, { value: 0, u: s }, {
        shares: { width_um: { felt: 1 - inScan, own: 1 - Math.max(inScan, asked * V) } },
      })],
    }, () => ({ slope: () => S, bend: () => 0 }));
    if (told === null) return;
    const [G, weight] = [told.gain("width_um"), told.weight("width_um")];
    // Against the share of q that the asked process' own expectation (weight `asked`) leaves open.
    const open = u * u * (1 - 2 * asked * V + asked * asked * V);
    const withScan = u * u * (1 - inScan - asked * V + asked * W * V);
    const surprise = (S * u) ** 2 * (1 - 2 * inScan + W * inScan) + s * s + uA * uA;
    const error = open - 2 * G * withScan * S + G * G * surprise;
    const stated = u * u - G * weight * u * u;
    ok(error <= stated * (1 + 1e-9), `${error} > ${stated}`);
  }));
});

Deno.test("where the scanned process is at its non-critical width, its second order is no surprise", () => {
  const bend = 8000; // 1/m per µm²
  const u = 0.1;
  const mean2 = bend * u * u / 2;
  const withBend = (offset: number, S: number, read = 0) =>
    drawn({ width_um: u }, [{ width_um: S }, { width_um: 1000 }], [
      scanned(offset, 1, { value: 0, u: 0 }, { read }),
    ], { A: () => bend });
  assertClose(withBend(mean2, 300).nominalOffset, 0, { abs: 1e-9 });
  // Of other guides' scans: these have the same mean in them.
  assertClose(withBend(0, 300, 1).nominalOffset, 0, { abs: 1e-9 });
  // A slope of nearly nothing would turn 40 1/m of it into 40 µm.
  const found = withBend(2 * mean2, 1);
  ok(Math.abs(found.nominalOffset) < 5, `${found.nominalOffset}`);
  assertClose(standardDeviation(found.offset), 1000 * u, { rel: 0.05 });
});

Deno.test("of several scans the one that tells most counts, and the remark names it", () => {
  const weak = scanned(900, 500);
  const strong = { ...scanned(100, 20), waves: { ...waves, polS: "TE" as const, polP: "TE" as const } };
  const of = (scans: OtherScan[]) =>
    drawn({ width_um: 0.1 }, [{ width_um: 1000 }, { width_um: 2000 }], scans);
  const both = of([weak, strong]);
  deepEqual(both.offset, of([strong]).offset);
  equal(both.told!.scan, strong);
  const [remark] = otherScanRemarks(both.inputs, both.told, both.slope);
  // The width takes 100²/(100² + 20²) of the scan, the asked process moves twice as far; u falls to 200·√(20²/(100² + 20²)).
  ok(remark!.includes("TE>TE+TM at 1582.0 nm, the one of its scans that tells most,"), remark);
  ok(remark!.includes("moves by 192 1/m") && remark!.includes("from 200 to 39.2 1/m"), remark);
});
