import { ok, throws } from "node:assert/strict";
import { fitTuningScan, isRefused, mismatchSpread, type TuningFit } from "../../../models/metrology/mod.ts";
import { peakShape } from "../../../models/metrology/_peak_shape.ts";
import {
  envelopeCurves,
  gratingEnvelope,
  type MismatchProfile,
  mismatchSteps,
  realiseMismatch,
  stepPhases,
  uniformGrating,
} from "../../../models/poling/mod.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";

const [length, ell, period] = [20e-3, 1e-3, 17e-6];
const vector = 2 * Math.PI / period;
const grating = uniformGrating({ start: 1e-3, length, period });
const steps = mismatchSteps(length, ell);
const plain = gratingEnvelope(grating, vector, steps);

/** A noisy scan of a guide over ±4.5 of its widths, centred a little off its peak; with what a fit makes of it. */
function scanned(seed: string, sd: number, known?: MismatchProfile) {
  const random = randomFrom(seed);
  const envelope = known === undefined ? plain : gratingEnvelope(grating, vector, steps, { profile: known });
  const profile = realiseMismatch({ start: 1e-3, length, sd, correlationLength: ell }, random);
  const curve = envelopeCurves(envelope)(stepPhases(profile));
  const points = Array.from({ length: 61 }, (_, k) => {
    const x = (k - 30) * 40;
    return { x, power: 7 * curve.power(curve.peak.at + 11 + x) / 0.405 + 0.3 + 0.05 * random.normal() };
  });
  const fit = fitTuningScan(points);
  if (isRefused(fit)) return null;
  return {
    fit,
    offsets: Float64Array.from(points, (p) => p.x - fit.centre.value),
    kept: curve.peak.power / envelopeCurves(envelope)().peak.power,
  };
}

Deno.test("the quick fit of simulated curves finds what the scan's own fit finds", () => {
  for (const [seed, sd] of [["a", 0], ["b", 200], ["c", 350]] as const) {
    const { fit, offsets } = scanned(seed, sd)!;
    const x = offsets.map((o) => o);
    const random = randomFrom(seed);
    const profile = realiseMismatch({ start: 1e-3, length, sd, correlationLength: ell }, random);
    const curve = envelopeCurves(plain)(stepPhases(profile));
    const y = x.map((o) => 7 * curve.power(curve.peak.at + 11 + o + fit.centre.value) / 0.405);
    const again = fitTuningScan([...x].map((o, k) => ({ x: o, power: y[k]! }))) as TuningFit;
    const quick = peakShape(x, y, 300)!;
    assertClose(quick.width, again.fwhm.value, { rel: 1e-3 });
    const n = x.length;
    assertClose(
      quick.structure,
      again.residual.lag1 * again.residual.relative ** 2 * (n - 4) / n,
      { rel: 0.03, abs: 1e-7 },
    );
  }
});

Deno.test("spreads of simulated guides are told within their u, and guides without one are refused with a limit", () => {
  const pulls: number[] = [];
  const heights: number[] = [];
  let refused = 0;
  for (let n = 0; n < 24; n++) {
    // As they are weighed a priori: evenly.
    const sd = 150 + 600 * (n + 0.5) / 24;
    const scan = scanned(`told ${n}`, sd);
    if (scan === null) continue;
    const found = mismatchSpread(scan.offsets, scan.fit, plain, ell);
    if (isRefused(found)) {
      refused++;
      continue;
    }
    ok(found.peakKept.value > 0 && found.peakKept.value < 1);
    heights.push((found.peakKept.value - scan.kept) / Math.hypot(found.peakKept.u, 0.005));
    pulls.push((found.sd.value - sd) / found.sd.u);
  }
  ok(pulls.length >= 18 && refused <= 4, `${pulls.length} told, ${refused} refused`);
  // Twenty pulls of spread 1 have a root mean square of 0.6 … 1.4 with a probability of over 0.98 (χ² of 20).
  for (const all of [pulls, heights]) {
    const rms = Math.sqrt(all.reduce((sum, p) => sum + p * p, 0) / all.length);
    ok(rms > 0.5 && rms < 1.4, `${rms}: ${all.map((p) => p.toFixed(1))}`);
  }
  for (let n = 0; n < 6; n++) {
    const { fit, offsets } = scanned(`none ${n}`, 0)!;
    const found = mismatchSpread(offsets, fit, plain, ell);
    ok(isRefused(found) && /as without a spread/.test(found.refused), JSON.stringify(found));
    ok(found.below! > 0 && found.below! < 250, `${found.below}`);
  }
});

Deno.test("broadening that the guide's own variation makes is none of a spread's", () => {
  const drift = { z: Float64Array.of(1e-3, 21e-3), delta: Float64Array.of(-300, 300) };
  const { fit, offsets } = scanned("chirped", 0, drift)!;
  const chirped = gratingEnvelope(grating, vector, steps, { profile: drift });
  const known = mismatchSpread(offsets, fit, chirped, ell);
  ok(isRefused(known) && /as without a spread/.test(known.refused), JSON.stringify(known));
  const unknown = mismatchSpread(offsets, fit, plain, ell);
  ok(!isRefused(unknown) && unknown.sd.value > unknown.sd.u, JSON.stringify(unknown));
});

Deno.test("a curve that no spread makes is refused, and an envelope cut otherwise is an error", () => {
  const { fit, offsets } = scanned("any", 0)!;
  const narrow = { ...fit, fwhm: { value: fit.fwhm.value / 2, u: fit.fwhm.u } };
  const found = mismatchSpread(offsets, narrow, plain, ell);
  ok(isRefused(found) && /no spread with a correlation of 0.001 m looks so/.test(found.refused));
  throws(() => mismatchSpread(offsets, fit, plain, 2e-3), /80 stretches, need 40/);
});
