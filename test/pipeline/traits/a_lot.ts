// A lot of two wafers with four guides, and trait rows for it, for tests of what each guide inherits.
import { platformSchema } from "../../../shared/schemas/platform.ts";
import type { Polarisation } from "../../../shared/vocabulary.ts";
import type { GuideRecord, LotDesign, PolingRecord } from "../../../pipeline/records.ts";
import type { TraitName, TraitRow } from "../../../pipeline/traits/trait_row.ts";

const SOURCE = { file_name: "guides.csv", source_file: "00", source_line: 2 };

/** `A-1/01/g1` → its record. */
export function guideRecord(id: string, over: Partial<GuideRecord> = {}): GuideRecord {
  const [wafer, die] = id.split("/") as [string, string];
  return {
    ...SOURCE,
    wafer,
    die_id: `${wafer}/${die}`,
    guide_id: id,
    x_mm: 0,
    y_mm: 0,
    group: null,
    width_um: 4,
    period_um: 46.05,
    length_mm: 8,
    poled_from_mm: 0.5,
    poled_length_mm: 7,
    ...over,
  };
}

export const GUIDES = ["A-1/01/g1", "A-1/01/g2", "A-1/02/g1", "A-2/01/g1"].map((id) => guideRecord(id));
export const [HERE, SAME_DIE, SAME_WAFER, SAME_LOT] = GUIDES as [
  GuideRecord,
  GuideRecord,
  GuideRecord,
  GuideRecord,
];

export function lotDesign(
  over: Partial<LotDesign> = {},
  guides: readonly GuideRecord[] = GUIDES,
): LotDesign {
  const guidesOfDie = new Map<string, GuideRecord[]>();
  for (const g of guides) guidesOfDie.set(g.die_id, [...guidesOfDie.get(g.die_id) ?? [], g]);
  return {
    lot: { ...SOURCE, lot: "A", platform: "p", started: null },
    guides,
    guideById: new Map(guides.map((g) => [g.guide_id, g])),
    guidesOfDie,
    coatingOf: new Map(),
    unavailable: new Map(),
    ...over,
  };
}

/** Coating entries `[die, facet, run]`, in order: the last of a facet counts. */
export const coatings = (...entries: (readonly [die: string, facet: "in" | "out", run: string])[]) =>
  new Map(
    entries.map(([die_id, facet, coating_run], entry) =>
      [`${die_id}|${facet}`, { ...SOURCE, die_id, facet, coating_run, entry }] as const
    ),
  );

export const PLATFORM = platformSchema.parse({
  platform: "p",
  material: "KTP",
  axes: { TE: "y", TM: "z" },
  index: { from: "bulk" },
  effective_area_um2: 40,
  nonlinear: { "TE>TE+TM": { d_pm_per_v: 3.92, at_nm: 1064 } },
  defaults: {
    loss_db_cm: { TE: { value: 0.5, u: 0.2 }, TM: { value: 0.9, u: 0.3 } },
    mfd_x_um: { value: 8, u: 1, at_nm: 1550 },
    mfd_y_um: { value: 6, u: 1, at_nm: 1550 },
    duty: { value: 0.5, u: 0.03 },
    coated_reflectivity: { value: 0.01, u: 0.01 },
  },
  priors: { loss_db_cm: { lot_sd: 0.05, wafer_sd: 0.03, die_sd: 0.02, guide_sd: 0.01 } },
});

/** A trait of a guide, die (`A-1/01`), wafer (`A-1`), or coating run and facet (`C1|out`). */
export function traitRow(
  trait: TraitName,
  unit: string,
  value: number,
  over: Partial<TraitRow> & { polarisation?: Polarisation | null } = {},
): TraitRow {
  const parts = unit.includes("|") ? [] : unit.split("/");
  return {
    trait,
    scope: unit.includes("|") ? "coating_run" : (["wafer", "die", "guide"] as const)[parts.length - 1]!,
    unit,
    wafer: parts[0] ?? null,
    die_id: parts.length > 1 ? parts.slice(0, 2).join("/") : null,
    guide_id: parts.length > 2 ? unit : null,
    width_um: parts.length > 2 ? 4 : null,
    wavelength_nm: null,
    polarisation: null,
    process: null,
    value,
    u: 0.001,
    u_from: "stated",
    method: "test",
    readings: [],
    detail: null,
    ...over,
  };
}

/** A poling window of a guide, die or wafer. */
export function window(unit: string, duty: number, over: Partial<PolingRecord> = {}): PolingRecord {
  const { scope, wafer, die_id, guide_id } = traitRow("duty", unit, duty);
  return {
    ...SOURCE,
    file_name: "readings/poling.csv",
    scope: scope as "guide",
    unit,
    wafer: wafer!,
    die_id,
    guide_id,
    window_start_mm: 3,
    window_length_mm: 1,
    domains: 21,
    duty_mean: duty,
    duty_sd: 0.02,
    merged: 0,
    ...over,
  };
}
