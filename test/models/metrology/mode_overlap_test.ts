import { ok, strictEqual, throws } from "node:assert/strict";
import fc from "fast-check";
import { assertClose } from "../../assert_close.ts";
import { centredOverlap, modeOverlap } from "../../../models/metrology/mod.ts";
import { mean } from "../../../shared/statistics.ts";
import { randomFrom } from "../../../shared/random.ts";

const loss = JSON.parse(
  Deno.readTextFileSync(new URL("../../../fixtures/check-values/loss.json", import.meta.url)),
);
const exact = (value: number) => ({ value, u: 0 });
/** Mode from 1/e field radii in µm: the full width at 1/e² of the intensity is twice that. */
const mode = (wx: number, wy: number, u = 0) => ({
  x: { value: 2e-6 * wx, u },
  y: { value: 2e-6 * wy, u },
});

Deno.test("modeOverlap() meets the tabulated couplings", () => {
  // H. Kogelnik (1964); D. Marcuse, Bell Syst. Tech. J. 56, 703 (1977) (from memory; recomputed by quadrature, E)
  for (const row of loss.gaussian_overlap.values) {
    const overlap = modeOverlap(mode(row.w1[0], row.w1[1]), mode(row.w2[0], row.w2[1]), {
      x: exact(row.d[0] * 1e-6),
      y: exact(row.d[1] * 1e-6),
    });
    assertClose(overlap.value, row.eta, { abs: 1e-7 });
    assertClose(-10 * Math.log10(overlap.value), row.dB, { abs: 1e-6 });
  }
});

Deno.test("modeOverlap() is the overlap integral of the two fields", () => {
  /** |∫ a·b|²/(∫a²·∫b²) along one axis by the trapezoidal rule, which is exact to rounding for Gaussians. */
  const slow = (w1: number, w2: number, d: number) => {
    let [ab, aa, bb] = [0, 0, 0];
    for (let k = -1500; k <= 1500; k++) {
      const x = k * 0.02;
      const a = Math.exp(-((x / w1) ** 2));
      const b = Math.exp(-(((x - d) / w2) ** 2));
      ab += a * b;
      aa += a * a;
      bb += b * b;
    }
    return ab ** 2 / (aa * bb);
  };
  const width = fc.double({ min: 1, max: 6, noNaN: true });
  const shift = fc.double({ min: -4, max: 4, noNaN: true });
  fc.assert(
    fc.property(width, width, width, width, shift, shift, (ax, ay, bx, by, dx, dy) => {
      const overlap =
        modeOverlap(mode(ax, ay), mode(bx, by), { x: exact(dx * 1e-6), y: exact(dy * 1e-6) }).value;
      assertClose(overlap, slow(ax, bx, dx) * slow(ay, by, dy), { rel: 1e-10 });
      const back =
        modeOverlap(mode(bx, by), mode(ax, ay), { x: exact(-dx * 1e-6), y: exact(-dy * 1e-6) }).value;
      assertClose(back, overlap, { rel: 1e-12 });
      ok(overlap > 0 && overlap <= 1 + 1e-15);
    }),
    { numRuns: 30, seed: 8 },
  );
});

Deno.test("u of the coupling agrees with sampling, away from and at perfect matching", () => {
  const random = randomFrom("overlap");
  const cases = [
    { a: mode(5.2, 5.2), b: mode(3.5, 2.5, 0.4e-6), d: { x: { value: 1e-6, u: 0.3e-6 }, y: exact(0) } },
    {
      a: mode(5.2, 5.2),
      b: mode(5.2, 5.2, 0.6e-6),
      d: { x: { value: 0, u: 0.4e-6 }, y: { value: 0, u: 0.4e-6 } },
    },
  ];
  for (const { a, b, d } of cases) {
    const { value, u } = modeOverlap(a, b, d);
    const squares: number[] = [];
    const draw = (q: { value: number; u: number }) => exact(q.value + q.u * random.normal());
    const values: number[] = [];
    for (let k = 0; k < 20_000; k++) {
      values.push(
        modeOverlap(a, { x: draw(b.x), y: draw(b.y) }, { x: draw(d.x), y: draw(d.y) }).value,
      );
    }
    const centre = mean(values);
    for (const v of values) squares.push((v - centre) ** 2);
    assertClose(Math.sqrt(mean(squares)), u, { rel: 0.1 });
    ok(u > 0 && u < value);
  }
});

Deno.test("modeOverlap() refuses widths and offsets without meaning", () => {
  throws(() => modeOverlap(mode(0, 1), mode(1, 1)), RangeError);
  throws(() => modeOverlap(mode(1, 1), mode(1, NaN)), RangeError);
  throws(() => modeOverlap(mode(1, 1, -1), mode(1, 1)), RangeError);
  throws(() => modeOverlap(mode(1, 1), mode(1, 1), { x: exact(Infinity), y: exact(0) }), RangeError);
});

Deno.test("centredOverlap() is modeOverlap() without offset, and as strict", () => {
  const [a, b] = [[8e-6, 6e-6], [10.4e-6, 10.4e-6]] as const;
  const size = ([x, y]: readonly [number, number]) => ({ x: exact(x), y: exact(y) });
  assertClose(centredOverlap(a, b), modeOverlap(size(a), size(b)).value, { rel: 1e-14 });
  strictEqual(centredOverlap(a, a), 1);
  for (const bad of [0, -1, NaN, Infinity]) throws(() => centredOverlap([bad, 1], b), RangeError);
});
