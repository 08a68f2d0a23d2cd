import assert from "node:assert/strict";
import { assertClose } from "../../../assert_close.ts";
import { type PlannedAxis, solvedMu, UNIFORM } from "./plane_modes.ts";

const published = JSON.parse(Deno.readTextFileSync("fixtures/check-values/modes.json"));

// E. M. Conwell, Appl. Phys. Lett. 23, 328 (1973) (from memory); recomputed with Bessel functions.
Deno.test("an exponential profile with no field at the surface has the indices of the Bessel solution", () => {
  for (const { V, b } of published.exponential_profile.zero_field) {
    b.forEach((expected: number, order: number) => {
      // Unit of length: the profile's depth; then n² − n_s² = V²·e^−y and μ = V²·b.
      const y: PlannedAxis = {
        segments: [{ dense: 0, far: 14 + 14 / (V * Math.sqrt(expected)), cells: 64, scale: 3 }],
        low: "zero",
        high: "zero",
      };
      const mu = solvedMu(100, (_, at) => V * V * Math.exp(-at), UNIFORM, y, order);
      // The last mode of V 6 is all but cut off: it reaches two hundred depths into the substrate.
      assertClose(mu! / (V * V), expected, { abs: expected > 1e-3 ? 3e-7 : 3e-6 }, `V ${V}, mode ${order}`);
    });
  }
});

Deno.test("under air the exponential profile has the four indices of the example", () => {
  const { lambda_um, ns, d_um, modes } = published.exponential_profile.example_air;
  const k0 = 2 * Math.PI / lambda_um;
  const step = 2 * ns * 0.01;
  const decay = 1 / Math.sqrt(ns * ns - 1);
  for (const { m, N } of modes) {
    const y: PlannedAxis = {
      segments: [
        { dense: 0, far: -14 * decay, cells: 12, scale: 4 * decay },
        {
          dense: 0,
          far: k0 * d_um * 12 + 14 / Math.sqrt(N * N - ns * ns),
          cells: 60,
          scale: 1.5 * k0 * d_um,
        },
      ],
      low: "zero",
      high: "zero",
    };
    const mu = solvedMu(
      ns,
      (_, at) => at < 0 ? 1 - ns * ns : step * Math.exp(-at / (k0 * d_um)),
      UNIFORM,
      y,
      m,
    );
    assertClose(Math.sqrt(ns * ns + mu!), N, { abs: 2e-7 }, `mode ${m}`);
  }
});

// Pöschl–Teller; H. Kogelnik in Integrated Optics, ed. T. Tamir (1975) (from memory); closed form.
Deno.test("a sech² profile has the closed form's indices, even and odd modes from their own halves", () => {
  for (const { V, b } of published.sech2_profile.values) {
    b.forEach((expected: number, m: number) => {
      const half: PlannedAxis = {
        segments: [{ dense: 0, far: 6 + 14 / (V * Math.sqrt(expected)), cells: 48, scale: 2 }],
        low: m % 2 === 0 ? "mirror" : "zero",
        high: "zero",
      };
      const mu = solvedMu(100, (_, y) => (V / Math.cosh(y)) ** 2, UNIFORM, half, m >> 1);
      assertClose(mu! / (V * V), expected, { abs: 5e-7 }, `V ${V}, mode ${m}`);
    });
  }
});

Deno.test("a parabola sideways and in depth has equally spaced indices", () => {
  const { n0, x0_um, lambda_um, N } = published.parabolic_profile.example;
  const k0 = 2 * Math.PI / lambda_um;
  const x0 = x0_um * k0;
  const floor = 2.1; // any index below the modes: the parabola itself has no substrate
  const half = (parity: number): PlannedAxis => ({
    segments: [{ dense: 0, far: 100, cells: 24, scale: Infinity }],
    low: parity === 0 ? "mirror" : "zero",
    high: "zero",
  });
  N.forEach((expected: number, m: number) => {
    const mu = solvedMu(
      floor,
      (_, y) => n0 ** 2 * (1 - (y / x0) ** 2) - floor ** 2,
      UNIFORM,
      half(m % 2),
      m >> 1,
    );
    assertClose(Math.sqrt(floor ** 2 + mu!), expected, { abs: 2e-7 }, `mode ${m}`);
  });
  // In both directions: N² = n0² − (2m + 2l + 2)·n0/(k0·x0).
  const both = solvedMu(
    floor,
    (x, y) => n0 ** 2 * (1 - (x * x + y * y) / x0 ** 2) - floor ** 2,
    half(0),
    half(0),
  );
  assertClose(Math.sqrt(floor ** 2 + both!), Math.sqrt(n0 ** 2 - 2 * n0 / x0), { abs: 1e-6 });
  assert.equal(N.length, 4);
});
