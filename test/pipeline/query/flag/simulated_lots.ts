// Fault-free lots as tables of traits, drawn from the spreads that their platform states.
import type { GuideRecord } from "../../../../pipeline/records.ts";
import type { LotFacts, StepFact, WaferFact } from "../../../../pipeline/query/flag/facts.ts";
import type { TraitName, TraitRow } from "../../../../pipeline/traits/trait_row.ts";
import { type Random, randomFrom } from "../../../../shared/random.ts";
import { platformSchema } from "../../../../shared/schemas/platform.ts";

/** A platform whose numbers are those of no process. */
export const PLATFORM = platformSchema.parse({
  platform: "invented",
  material: "CLN",
  axes: { TE: "y", TM: "z" },
  index: { from: "bulk" },
  effective_area_um2: 40,
  nonlinear: { "TM>TM+TM": { d_pm_per_v: 20, at_nm: 1064 } },
  defaults: {
    loss_db_cm: { value: 0.2, u: 0.06 },
    duty: { value: 0.5, u: 0.04 },
    duty_sd: { value: 0.05, u: 0.02 },
    titanium_nm: { value: 100, u: 1.6 },
    coated_reflectivity: { value: 0.01, u: 0.01 },
    mismatch_offset_per_m: { value: 0, u: 5000 },
  },
  priors: {
    loss_db_cm: { lot_sd: 0.04, wafer_sd: 0.03, die_sd: 0.015, guide_sd: 0.02 },
    duty: { lot_sd: 0.02, wafer_sd: 0.015, die_sd: 0.01, guide_sd: 0.01 },
    duty_sd: { lot_sd: 0.008, wafer_sd: 0.004, die_sd: 0.003, guide_sd: 0.003 },
    titanium_nm: { lot_sd: 1.2, wafer_sd: 0.5, die_sd: 0.4, guide_sd: 0.1 },
  },
});

export const SOURCE = { file_name: "readings/x.csv", source_file: "0".repeat(64), source_line: 2 };

/** What is read of every second guide, with what u. */
const READ: readonly { readonly trait: TraitName; readonly centre: number; readonly u: number }[] = [
  { trait: "loss_db_cm", centre: 0.2, u: 0.03 },
  { trait: "duty", centre: 0.5, u: 0.004 },
  { trait: "duty_sd", centre: 0.05, u: 0.002 },
  { trait: "titanium_nm", centre: 100, u: 0.3 },
];

export interface SimulatedLot {
  readonly wafers?: number;
  readonly dies?: number;
  readonly guides?: number;
  /** What is added to a trait of a guide: a fault. */
  readonly fault?: (trait: TraitName, guide: GuideRecord) => number;
  readonly steps?: (wafer: string) => readonly (readonly [step: string, tool: string, recipe: string])[];
}

/** A lot without predictions, files or coatings. The same number gives the same lot. */
export function simulatedLot(number: number, shape: SimulatedLot = {}): LotFacts {
  const lot = `L${String(number).padStart(3, "0")}`;
  const random = randomFrom(`simulated lot ${number}`);
  const { wafers: count = 2, dies = 10, guides: perDie = 4 } = shape;
  const wafers: WaferFact[] = Array.from({ length: count }, (_, k) => ({
    ...SOURCE,
    wafer: `${lot}-${k + 1}`,
    diameter_mm: 76.2,
    substrate_batch: "B-1",
  }));
  const guides = wafers.flatMap(({ wafer }) =>
    Array.from({ length: dies }, (_, d) => d).flatMap((d) =>
      Array.from({ length: perDie }, (_, g): GuideRecord => {
        const die_id = `${wafer}/${String(d + 1).padStart(2, "0")}`;
        return {
          ...SOURCE,
          wafer,
          die_id,
          guide_id: `${die_id}/g${g + 1}`,
          x_mm: 10 * (d % 4) - 15,
          y_mm: 10 * Math.floor(d / 4) - 10,
          group: "A",
          width_um: 7,
          period_um: 17,
          length_mm: 18,
          poled_from_mm: 0,
          poled_length_mm: 18,
        };
      })
    )
  );
  const steps = shape.steps ?? (() => [["diffusion", "furnace-1", "D4"], ["poling", "hv-1", "P2"]] as const);
  return {
    lot,
    started: new Date(Date.UTC(2020, 0, 1 + 7 * number)).toISOString().slice(0, 10),
    platform: PLATFORM,
    design: {
      lot: { ...SOURCE, lot, platform: "invented", started: null },
      guides,
      guideById: new Map(guides.map((g) => [g.guide_id, g])),
      guidesOfDie: Map.groupBy(guides, (g) => g.die_id),
      coatingOf: new Map(),
      unavailable: new Map(),
    },
    wafers,
    steps: wafers.flatMap(({ wafer }) =>
      steps(wafer).map(([step, tool, recipe], k): StepFact => ({
        ...SOURCE,
        wafer,
        order: k + 1,
        step,
        tool,
        recipe,
        finished: null,
      }))
    ),
    coatings: [],
    traits: READ.flatMap((read) => traitRows(guides, read, random, shape.fault)),
    made: { model: "1", platform_sha256: SOURCE.source_file },
    reduceRemarks: [],
    quarantine: [],
    rows: 1000,
    files: new Map(),
    outcomes: [],
    periods: [],
    predictions: [],
    requestsNamed: false,
  };
}

function traitRows(
  guides: readonly GuideRecord[],
  { trait, centre, u }: typeof READ[number],
  random: Random,
  fault: SimulatedLot["fault"],
): TraitRow[] {
  const sd = PLATFORM.priors[trait as "duty"]!;
  const effects = new Map<string, number>();
  const effect = (id: string, s: number) => {
    if (!effects.has(id)) effects.set(id, s * random.normal());
    return effects.get(id)!;
  };
  const lot = sd.lot_sd * random.normal();
  return guides.filter((_, k) => k % 2 === 0).map((g) => ({
    trait,
    scope: "guide",
    unit: g.guide_id,
    wafer: g.wafer,
    die_id: g.die_id,
    guide_id: g.guide_id,
    width_um: g.width_um,
    wavelength_nm: trait === "loss_db_cm" ? 1550 : null,
    polarisation: trait === "loss_db_cm" ? "TM" : null,
    process: null,
    value: centre + lot + effect(g.wafer, sd.wafer_sd) + effect(g.die_id, sd.die_sd) +
      sd.guide_sd * random.normal() +
      u * random.normal() + (fault?.(trait, g) ?? 0),
    u,
    u_from: "stated",
    method: "simulated",
    readings: [{ table: "x", file_name: SOURCE.file_name, source_file: SOURCE.source_file, lines: [[2, 2]] }],
    detail: null,
  }));
}
