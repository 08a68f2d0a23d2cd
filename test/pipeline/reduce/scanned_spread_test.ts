import { ok } from "node:assert/strict";
import { predictGuide } from "../../../models/decision/mod.ts";
import { mismatch } from "../../../models/guides/mod.ts";
import {
  bandCovering,
  gratingSpectrum,
  realiseMismatch,
  spectrumPower,
  uniformGrating,
} from "../../../models/poling/mod.ts";
import { reduceTuning } from "../../../pipeline/reduce/tuning.ts";
import type { LotReadings } from "../../../pipeline/reduce/lot_readings.ts";
import { resolveGuide, windowsByUnit } from "../../../pipeline/traits/guide_traits.ts";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import { platformSchema } from "../../../shared/schemas/platform.ts";
import { randomFrom } from "../../../shared/random.ts";
import type { ThreeWaves } from "../../../shared/vocabulary.ts";
import { ktp, request } from "../../models/decision/a_guide.ts";
import { guideRecord, lotDesign } from "../traits/a_lot.ts";

const platform = platformSchema.parse({
  ...JSON.parse(Deno.readTextFileSync("models/platforms/bulk-ktp.json")),
  defaults: {
    loss_db_cm: 0,
    mfd_x_um: { value: 8, u: 1, at_nm: 1550 },
    mfd_y_um: { value: 6, u: 1, at_nm: 1550 },
    duty: 0.5,
    coated_reflectivity: 0.01,
  },
});
const [poledFrom, poledLength] = [1e-3, 18e-3];
const at = (lambda: number): ThreeWaves => ({
  lambdaP: lambda / 2,
  lambdaS: lambda,
  lambdaI: lambda,
  polP: "TM",
  polS: "TM",
  polI: "TM",
});
const bare = (lambda: number, T: number) => mismatch(ktp.index, at(lambda), T, { width_um: 4 });
const [lambda0, T0] = [1582e-9, 40];
const period = 2 * Math.PI / Math.abs(bare(lambda0, T0)) / ktp.expansion(T0);
const grating = uniformGrating({ start: poledFrom, length: poledLength, period });
/** Δβ per m of wavelength, from which a width in wavelength follows. */
const slope = (bare(lambda0 + 1e-12, T0) - bare(lambda0 - 1e-12, T0)) / 2e-12;
const doubling = request({
  process: "second-harmonic",
  polarisations: { pump: "TM", signal: "TM", idler: "TM" },
  signal: { wavelength_nm: 1582 },
});

/** A guide whose Δβ has a spread, scanned, reduced, and predicted for the process of the scan. Null: the scan was refused. */
function asScanned(n: number, sd: number) {
  const guide = guideRecord(`A-1/01/g${n}`, {
    length_mm: 20,
    poled_from_mm: 1,
    poled_length_mm: 18,
    period_um: period * 1e6,
  });
  const random = randomFrom(`scanned guide ${n}`);
  const profile = realiseMismatch(
    { start: poledFrom, length: poledLength, sd, correlationLength: 1e-3 },
    random,
  );
  const s = ktp.expansion(T0);
  const middle = bare(lambda0, T0) * s;
  const spectrum = gratingSpectrum(grating, bandCovering(middle - 6e3, middle + 6e3, poledLength), {
    profile,
  });
  let peak = 0;
  for (let x = -3e3; x <= 3e3; x += 10) {
    if (spectrumPower(spectrum, middle + x) > spectrumPower(spectrum, middle + peak)) peak = x;
  }
  const tuning = Array.from({ length: 61 }, (_, k) => {
    const lambda = lambda0 + (peak + (k - 30) * 45) / slope;
    return {
      scope: "guide",
      unit: guide.guide_id,
      ...guide,
      scan: "s",
      process: "second-harmonic",
      polarisations: "TM+TM>TM",
      temperature_c: T0,
      wavelength_nm: lambda * 1e9,
      power_rel: spectrumPower(spectrum, bare(lambda, T0) * s) + 0.05 + 0.004 * random.normal(),
      file_name: "readings/tuning.csv",
      source_file: "00",
      source_line: k + 2,
    };
  });
  const design = lotDesign({}, [guide]);
  const { traits } = reduceTuning(
    { tuning, poling: [], design, platform, model: ktp } as unknown as LotReadings,
    new Map(),
    new TraitPools(platform, design, []),
  );
  const length = traits.find((t) => t.trait === "effective_length_mm");
  if (length === undefined) return null;
  const { inputs } = resolveGuide(
    new TraitPools(platform, design, traits),
    windowsByUnit([]),
    guide,
    doubling,
    null,
  );
  const figures =
    predictGuide(ktp, doubling, inputs, { recorded: null, size: { draws: 128, spectral: 16 } }).figures;
  const figure = (name: string) => figures.find((f) => f.figure === name)!;
  const width = 5.566229513 / (length.value * 1e-3) / Math.abs(slope * s) * 1e9;
  return {
    told: inputs.mismatchSpread !== null,
    width: { value: width, u: width * length.u / length.value },
    acceptance: figure("acceptance_nm"),
    efficiency: figure("efficiency_percent_per_w"),
    truth: spectrumPower(spectrum, middle + peak) / (2 / Math.PI) ** 2,
  };
}

Deno.test("the acceptance of a scanned guide is predicted as wide as its scan was, and its efficiency as low as its peak", () => {
  // The same guide without a spread, whose efficiency all others are held against.
  const ideal = asScanned(1000, 0)!;
  ok(!ideal.told);
  const guides = Array.from({ length: 100 }, (_, n) => asScanned(n, 100 + 5 * n)).filter((g) => g !== null);
  const told = guides.filter((g) => g.told);
  ok(guides.length >= 85 && told.length >= 60, `${guides.length} scanned, ${told.length} told`);
  const share = (kept: (g: typeof told[number]) => boolean) => told.filter(kept).length / told.length;
  const wide = share(({ width, acceptance }) =>
    Math.abs(acceptance.mean! - width.value) <= 2 * Math.hypot(acceptance.u!, width.u, 0.01 * width.value)
  );
  // 95 % of 60 … 90 guides, less three standard errors.
  ok(wide >= 0.87, `${wide}`);
  const high = share(({ efficiency, truth }) =>
    truth * ideal.efficiency.mean! >= efficiency.lo! && truth * ideal.efficiency.mean! <= efficiency.hi!
  );
  ok(high >= 0.87, `${high}`);
  const pulls = told.map(({ efficiency, truth }) =>
    (efficiency.mean! - truth * ideal.efficiency.mean!) / efficiency.u!
  );
  const mean = pulls.reduce((sum, p) => sum + p, 0) / pulls.length;
  ok(Math.abs(mean) < 0.7, `${mean}`);
});
