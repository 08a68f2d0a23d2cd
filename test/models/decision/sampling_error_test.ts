import assert from "node:assert/strict";
import fc from "fast-check";
import { DEFAULT_SAMPLE, drawTrait, nestedStrata } from "../../../models/decision/draws.ts";
import { predictGuide } from "../../../models/decision/mod.ts";
import { followsSpectra, independentDraws, settledAt } from "../../../models/decision/sampling_error.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";
import { guide, ktp, request, trait, TYPE_II } from "./a_guide.ts";

const AT = { acceptAt: 0.9, rejectBelow: 0.1 };
const normal = (name: string) => drawTrait({ value: 0, u: 1 }, {}, nestedStrata(256, 16, randomFrom(name)));
const atLeast = (draws: Float64Array, limit: number) => ({
  draws,
  limits: { atLeast: limit, atMost: Infinity },
});

Deno.test("settledAt() asks for more draws within two binomial errors of a threshold, and nowhere else", () => {
  // √(0.9·0.1/256) = 0.01875
  assert.equal(settledAt(0.9 + 0.037, [], DEFAULT_SAMPLE, AT), false);
  assert.equal(settledAt(0.9 - 0.038, [], DEFAULT_SAMPLE, AT), true);
  assert.equal(settledAt(0.1 + 0.037, [], DEFAULT_SAMPLE, AT), false);
  for (const p of [0, 0.5, 1]) assert.equal(settledAt(p, [], DEFAULT_SAMPLE, AT), true);
  assert.equal(settledAt(0.93, [], { draws: 1024, spectral: 64 }, AT), true);
});

Deno.test("settledAt() never calls a larger sample less settled", () => {
  fc.assert(fc.property(
    fc.double({ min: 0, max: 1, noNaN: true }),
    fc.double({ min: 0, max: 1, noNaN: true }),
    fc.double({ min: 0, max: 1, noNaN: true }),
    (p, a, b) => {
      const at = { acceptAt: Math.max(a, b), rejectBelow: Math.min(a, b) };
      const small = settledAt(p, [], DEFAULT_SAMPLE, at);
      assert.ok(!small || settledAt(p, [], { draws: 1024, spectral: 64 }, at));
    },
  ));
});

Deno.test("independentDraws() counts spectra alone where a figure that follows them is in doubt", () => {
  const draws = normal("x");
  const repeated = draws.map((_, k) => draws[k % 16]!);
  assert.ok(followsSpectra(repeated, DEFAULT_SAMPLE) && !followsSpectra(draws, DEFAULT_SAMPLE));
  assert.equal(independentDraws([atLeast(draws, 0)], DEFAULT_SAMPLE), 256);
  assert.equal(independentDraws([atLeast(repeated, 0)], DEFAULT_SAMPLE), 16);
  // Nothing fails among 16, but a limit 1.9 u away is no certainty; one 5 u away is.
  assert.equal(independentDraws([atLeast(repeated, -1.9)], DEFAULT_SAMPLE), 16);
  assert.equal(independentDraws([atLeast(repeated, -5), atLeast(draws, 0)], DEFAULT_SAMPLE), 256);
  assert.equal(independentDraws([atLeast(repeated.map(() => NaN), 0)], DEFAULT_SAMPLE), 256);
});

Deno.test("independentDraws() lies between both where spectra carry a part of a figure", () => {
  const draws = normal("x");
  for (const weight of [0.5, 1, 2]) {
    const mixed = draws.map((x, k) => x + weight * normal("y")[k % 16]!);
    const share = weight ** 2 / (1 + weight ** 2);
    const n = independentDraws([atLeast(mixed, 0)], DEFAULT_SAMPLE);
    // 16 spectra tell a share to about a third.
    assertClose(1 / n, share / 16 + (1 - share) / 256, { rel: 0.4 });
  }
});

Deno.test("settledAt() asks for nothing more where one requirement is missed by far, whatever the others are", () => {
  const doubtful = atLeast(normal("x"), 0);
  assert.equal(settledAt(0.1, [doubtful], DEFAULT_SAMPLE, AT), false);
  assert.equal(settledAt(0, [doubtful, atLeast(normal("y"), 10)], DEFAULT_SAMPLE, AT), true);
  assert.equal(settledAt(0, [doubtful, atLeast(normal("y").map(() => NaN), 0)], DEFAULT_SAMPLE, AT), true);
});

Deno.test("predictGuide() grows its sample until the decision is settled, as far as it may", () => {
  const loss = (at_most: number) =>
    request({
      process: "second-harmonic",
      polarisations: TYPE_II,
      signal: { wavelength_nm: 1582 },
      require: [{ figure: "loss_db_cm_signal", at_most }],
    });
  const uncertain = { ...guide, signal: { ...guide.signal, loss: trait(0.5, 0.1, "loss") } };
  const ask = (at_most: number, mostDraws?: number) =>
    predictGuide(ktp, loss(at_most), uncertain, {
      recorded: null,
      ...(mostDraws === undefined ? {} : { mostDraws }),
    });
  // P(loss ≤ 0.62816) = Φ(1.2816) = 0.9: no sample settles that. Φ(1.45) = 0.926 is settled with 1,024.
  const edge = 0.5 + 0.1 * 1.2816;
  assert.deepEqual([ask(edge).draws, ask(edge).settled], [256, false]);
  assert.deepEqual([ask(edge, 4096).draws, ask(edge, 4096).settled], [4096, false]);
  assert.deepEqual([ask(0.645, 4096).draws, ask(0.645, 4096).settled], [1024, true]);
  assert.deepEqual([ask(0.9, 4096).draws, ask(0.9, 4096).settled], [256, true]);
});
