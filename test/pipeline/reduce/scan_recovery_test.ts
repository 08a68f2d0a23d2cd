import { deepEqual, equal, match, ok } from "node:assert/strict";
import { reduceTuning } from "../../../pipeline/reduce/tuning.ts";
import type { LotReadings } from "../../../pipeline/reduce/lot_readings.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import { randomFrom } from "../../../shared/random.ts";
import { assertClose } from "../../assert_close.ts";
import { ktp } from "../../models/decision/a_guide.ts";
import { KTP, mismatch, type Waves } from "../../second_opinion.ts";
import { guideRecord, lotDesign, PLATFORM } from "../traits/a_lot.ts";

const guide = guideRecord("A-1/01/g1", {
  length_mm: 20,
  poled_from_mm: 1,
  poled_length_mm: 18,
  period_um: 46.05,
});
const L = 18e-3;

/** A scan in wavelength at 40 °C of a guide whose Δβ is off by `offset` (1/m), with noise and a dark level. */
function scan(offset: number, noise: number, seed: number, over: object = {}) {
  const random = randomFrom(seed);
  return Array.from({ length: 161 }, (_, k) => {
    const nm = 1579 + k * 0.05;
    const waves: Waves = { p: nm / 2 * 1e-9, s: nm * 1e-9, i: nm * 1e-9, pol: { p: "TM", s: "TM", i: "TM" } };
    const x =
      (Math.abs(mismatch(KTP, waves, 40) + offset) - 2 * Math.PI / (PERIOD_UM * 1e-6 * KTP.stretch(40))) * L *
      KTP.stretch(40) / 2;
    const power = x === 0 ? 1 : (Math.sin(x) / x) ** 2;
    return {
      scope: "guide",
      unit: guide.guide_id,
      ...guide,
      scan: `s${seed}`,
      process: "second-harmonic",
      polarisations: "TM+TM>TM",
      temperature_c: 40,
      wavelength_nm: nm,
      power_rel: 3 * power + 0.2 + 3 * noise * random.normal(),
      file_name: "readings/tuning.csv",
      source_file: "00",
      source_line: k + 2,
      ...over,
    };
  });
}
/** Matches 1583 nm at 40 °C: type 0 along z, where a scan in wavelength has a narrow peak. */
const PERIOD_UM = (() => {
  const w: Waves = { p: 791.5e-9, s: 1583e-9, i: 1583e-9, pol: { p: "TM", s: "TM", i: "TM" } };
  return 2e6 * Math.PI / (Math.abs(mismatch(KTP, w, 40)) * KTP.stretch(40));
})();

function reduce(tuning: object[], of = { ...guide, period_um: PERIOD_UM }) {
  const design = lotDesign({}, [of]);
  return reduceTuning(
    { tuning, poling: [], design, platform: PLATFORM, model: ktp } as unknown as LotReadings,
    new Map(),
    new TraitPools(PLATFORM, design, []),
  );
}
const trait = (reduced: ReturnType<typeof reduce>, name: string) =>
  reduced.traits.find((t) => t.trait === name)!;

Deno.test("the offset of a noisy scan is recovered within its u", () => {
  const pulls: number[] = [];
  for (let seed = 1; seed <= 16; seed++) {
    const offset = 60 * Math.sin(seed);
    const { value, u, process } = trait(reduce(scan(offset, 0.02, seed)), "mismatch_offset_per_m");
    equal(process, "TM>TM+TM");
    ok(u > 0.05 && u < 10, `u ${u}`);
    pulls.push((value - offset) / u);
  }
  for (const pull of pulls) ok(Math.abs(pull) < 4, `${pull}`);
  const rms = Math.sqrt(pulls.reduce((sum, p) => sum + p * p, 0) / pulls.length);
  // 16 pulls of spread 1: their root mean square lies in 0.5…1.5 with a probability of over 0.99 (χ² of 16).
  ok(rms > 0.5 && rms < 1.5, `${rms}`);
});

Deno.test("the width of a clean scan is that of its poled length", () => {
  const length = trait(reduce(scan(0, 0.002, 5)), "effective_length_mm");
  assertClose(length.value, 18, { rel: 0.01 });
});

Deno.test("a scan that names no guide, or a guide that is not poled, is refused with the reason", () => {
  const dieOnly = reduce(scan(0, 0.01, 1, { scope: "die", unit: "A-1/01", guide_id: null }));
  deepEqual(dieOnly.traits, []);
  match(dieOnly.remarks[0]!.statement, /this one names none/);
  const bare = reduce(scan(0, 0.01, 1), { ...guide, poled_length_mm: 0 });
  deepEqual(bare.traits, []);
  match(bare.remarks[0]!.statement, /not poled/);
  equal(bare.remarks[0]!.code, "tuning_refused");
});

Deno.test("a clean scan is told to be symmetric, and to leave no spread: 0 with the limit for its u", () => {
  const reduced = reduce(scan(0, 0.01, 3));
  const asymmetry = trait(reduced, "asymmetry");
  ok(Math.abs(asymmetry.value) < 4 * asymmetry.u && asymmetry.u < 0.1, JSON.stringify(asymmetry));
  const spread = trait(reduced, "mismatch_sd_per_m");
  equal(spread.value, 0);
  ok(spread.u > 0 && spread.u < 300, `${spread.u}`);
  match(
    spread.detail!,
    /none told at a correlation length of 1 mm, beside an ideal grating: .*as without a spread/,
  );
});
