import type {
  ArmTraits,
  GuideInputs,
  PolingTraits,
  PolingWindow,
  Role,
  UsedTrait,
} from "../../models/decision/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import { mm, toNm, um } from "../../shared/units.ts";
import type { Basis, Polarisation } from "../../shared/vocabulary.ts";
import { processName } from "../../models/guides/mod.ts";
import type { InformationShares } from "../../models/pooling/mod.ts";
import type { GuideRecord, PolingRecord } from "../records.ts";
import type { AlongByGuide, AlongReadings } from "./along_guide.ts";
import { resolveGeometry } from "./geometry.ts";
import { resolveSpread } from "./mismatch_spread.ts";
import { resolveOtherScans } from "./other_scans.ts";
import type { ResolvedTrait, TraitPools } from "./pools.ts";
import type { ReadingRef } from "./trait_row.ts";
import { refsOf } from "./trait_row.ts";

/** One trait that a guide's prediction uses, in its role, with where it came from. */
export interface RoleTrait {
  readonly role: Role;
  readonly trait: string;
  readonly wavelength_nm: number | null;
  readonly polarisation: Polarisation | null;
  readonly value: number | null;
  readonly u: number | null;
  readonly basis: Basis;
  /** Unit whose readings were used, or the platform. */
  readonly from: string;
  readonly distance: number | null;
  /** Positions of the trait rows used. */
  readonly used: readonly number[];
  /** Readings used directly, without a trait row in between. */
  readonly refs: readonly ReadingRef[];
  readonly note: string | null;
  /** Share of the value that readings of each level and the platform's default have; null where it is not pooled. */
  readonly shares: InformationShares | null;
}

/** Poling windows in force, by the full id of the guide, die or wafer that they belong to. */
export type WindowsByUnit = ReadonlyMap<string, readonly PolingRecord[]>;

export function windowsByUnit(records: readonly PolingRecord[]): WindowsByUnit {
  const byUnit = new Map<string, PolingRecord[]>();
  for (const record of records) {
    const held = byUnit.get(record.unit);
    if (held === undefined) byUnit.set(record.unit, [record]);
    else held.push(record);
  }
  return byUnit;
}

/** Everything that one guide's prediction for one request rests on. */
export interface ResolvedGuide {
  readonly inputs: GuideInputs;
  readonly roles: readonly RoleTrait[];
}

/**
 * Resolves the traits of a guide for a request. Order of trust for the grating: complete walls, the guide's own poling
 * windows, windows of its die or wafer, the pooled trait, the platform's default.
 * @param walls complete wall list of the guide (µm), or null
 */
export function resolveGuide(
  pools: TraitPools,
  windows: WindowsByUnit,
  guide: GuideRecord,
  checked: CheckedRequest,
  walls: Float64Array | null,
  along: AlongByGuide = new Map(),
): ResolvedGuide {
  const roles: RoleTrait[] = [];
  const { lambdaP, lambdaS, lambdaI, polP, polS, polI } = checked.waves;
  const loss = (role: Role, lambda: number, pol: Polarisation): UsedTrait => {
    const found = pools.need("loss_db_cm", guide, wavelengthNm(lambda), pol);
    roles.push(roleOf(role, found));
    return used(found);
  };
  const arm = (name: "signal" | "idler", lambda: number, pol: Polarisation): ArmTraits => {
    const armLoss = loss(`${name}_loss`, lambda, pol);
    const x = pools.estimate("mfd_x_um", guide, wavelengthNm(lambda), pol);
    const y = pools.estimate("mfd_y_um", guide, wavelengthNm(lambda), pol);
    for (const size of [x, y]) if (size !== null) roles.push(roleOf(`${name}_mode`, size));
    const { facet, resolved } = pools.outputFacet(guide, wavelengthNm(lambda), pol);
    roles.push(
      resolved === null
        ? {
          role: `${name}_facet`,
          trait: "reflectivity",
          wavelength_nm: wavelengthNm(lambda),
          polarisation: pol,
          value: null,
          u: null,
          basis: "die",
          from: guide.die_id,
          distance: null,
          used: [],
          refs: [],
          note: "no coating of the output facet in lot.json: bare, from the effective index",
          shares: null,
        }
        : roleOf(`${name}_facet`, resolved),
    );
    const mode = x === null || y === null
      ? {
        reason: `no mode size is known at ${
          wavelengthNm(lambda)
        } nm ${pol}: neither read nor a platform default`,
      }
      : { x: used(x), y: used(y), read: x.shares !== null || y.shares !== null };
    return { loss: armLoss, mode, facet };
  };
  const pumpLoss = loss("pump_loss", lambdaP, polP);
  const signal = arm("signal", lambdaS, polS);
  const idler = arm("idler", lambdaI, polI);
  const poling = resolvePoling(pools, windows, guide, walls, roles);
  const usualOffset = pools.usualOffset(processName(polP, polS, polI), wavelengthNm(2 * lambdaP));
  const offset = pools.offset(guide, processName(polP, polS, polI), wavelengthNm(2 * lambdaP));
  if (offset !== null) roles.push(roleOf("phase_matching", offset));
  const spread = resolveSpread(pools, guide, checked.waves);
  if (spread !== null) roles.push(...spread.told.map((t) => roleOf("poling", t)));
  const resolvedGeometry = resolveGeometry(pools, guide);
  const { geometry, errors } = resolvedGeometry;
  const others = resolveOtherScans(pools, guide, checked.waves, offset, resolvedGeometry);
  roles.push(...others.told.map((t) => roleOf("phase_matching", t)));
  for (const { resolved } of errors) roles.push(roleOf("phase_matching", resolved));
  const varying = along.get(guide.guide_id) ?? [];
  for (const reading of varying) roles.push(alongRole(reading, guide));
  // A scan of the guide itself measures the sum of all errors of its geometry: they must not be added a second time.
  const scanned = offset?.basis === "measured";
  const inputs: GuideInputs = {
    id: guide.guide_id,
    geometry,
    geometryErrors: scanned
      ? []
      : errors.map(({ parameter, resolved }) => ({ parameter, trait: used(resolved) })),
    along: varying.flatMap((v) => v.along ?? []),
    length: mm(guide.length_mm),
    period: um(guide.period_um),
    poledFrom: mm(guide.poled_from_mm),
    poledLength: mm(guide.poled_length_mm),
    pumpLoss,
    signal,
    idler,
    poling,
    offset: offset === null ? null : used(offset),
    ...(usualOffset === null ? {} : { usualOffset }),
    ...(others.scans.length === 0 ? {} : { otherScans: others.scans }),
    mismatchSpread: spread?.traits ?? null,
  };
  return { inputs, roles };
}

/** Rounded to 1e-6 nm, so that a wavelength that went through SI compares equal to the one in the file. */
export const wavelengthNm = (lambda: number): number => Number(toNm(lambda).toFixed(6));

const used = ({ value, u, basis, key }: ResolvedTrait): UsedTrait => ({ value, u, basis, key });

type Told = Omit<ResolvedTrait, "trait"> & { readonly trait: string; readonly note?: string };
const roleOf = (role: Role, t: Told): RoleTrait => ({
  role,
  trait: t.trait,
  wavelength_nm: t.wavelength_nm,
  polarisation: t.polarisation,
  value: t.value,
  u: t.u,
  basis: t.basis,
  from: t.from,
  distance: t.distance,
  used: t.used,
  refs: [],
  note: t.note ?? (t.otherWidth ? "from guides of another design width" : null),
  shares: t.shares,
});

/** Readings along a guide, used or seen to say nothing. */
function alongRole({ parameter, along, sd, u, places, refs }: AlongReadings, guide: GuideRecord): RoleTrait {
  return {
    role: "phase_matching",
    trait: `${parameter} along the guide`,
    wavelength_nm: null,
    polarisation: null,
    value: null,
    u: null,
    basis: "measured",
    from: guide.guide_id,
    distance: null,
    used: [],
    refs,
    note: along === null
      ? `${places} places scatter by ${sd.toPrecision(2)}, no more than their u of ${
        u.toPrecision(2)
      }: not used`
      : `varies by ${sd.toPrecision(2)} over ${places} places`,
    shares: null,
  };
}

function resolvePoling(
  pools: TraitPools,
  windows: WindowsByUnit,
  guide: GuideRecord,
  walls: Float64Array | null,
  roles: RoleTrait[],
): PolingTraits {
  const common = {
    role: "poling" as const,
    wavelength_nm: null,
    polarisation: null,
    value: null,
    u: null,
    distance: null,
    shares: null,
  };
  if (walls !== null) {
    const used = pools.positions("walls_complete", guide.guide_id).filter((k) => pools.rows[k]!.value === 1);
    roles.push({
      ...common,
      trait: "walls",
      basis: "measured",
      from: guide.guide_id,
      used,
      refs: [],
      note: `${walls.length} walls`,
    });
    return { from: "walls", walls: walls.map(um), basis: "measured" };
  }
  const around = windowsAround(windows, guide);
  if (around !== null) {
    const { basis, unit, own } = around;
    roles.push({
      ...common,
      trait: "poling windows",
      basis,
      from: unit,
      used: [],
      refs: refsOf("poling", own),
      note: `${own.length} windows`,
    });
    const seen = { from: "windows" as const, windows: own.map(windowOf), basis };
    if (basis === "measured") return seen;
    const duty = pools.estimate("duty", guide, null, null);
    if (duty === null) return seen;
    roles.push({ ...roleOf("poling", duty), note: `spreads the duty of the windows of ${unit}` });
    return { ...seen, duty: used(duty) };
  }
  const need = (trait: "duty" | "duty_sd" | "merged"): UsedTrait => {
    // Platforms need not speak of merged domains or spread: then there are none, exactly.
    const found = trait === "duty"
      ? pools.need(trait, guide, null, null)
      : pools.estimate(trait, guide, null, null);
    if (found === null) return { value: 0, u: 0, basis: "platform", key: `${trait}|none` };
    roles.push(roleOf("poling", found));
    return { value: found.value, u: found.u, basis: found.basis, key: found.key };
  };
  return { from: "duty", duty: need("duty"), dutySd: need("duty_sd"), merged: need("merged") };
}

/** The poling windows that speak for a guide: its own, else its die's, else its wafer's; null without any. */
export function windowsAround(
  windows: WindowsByUnit,
  guide: GuideRecord,
): { readonly basis: Basis; readonly unit: string; readonly own: readonly PolingRecord[] } | null {
  const units = [["measured", guide.guide_id], ["die", guide.die_id], ["wafer", guide.wafer]] as const;
  for (const [basis, unit] of units) {
    const own = windows.get(unit)?.filter((w) => w.domains + w.merged > 0) ?? [];
    if (own.length > 0) return { basis, unit, own };
  }
  return null;
}

export const windowOf = (w: PolingRecord): PolingWindow => ({
  from: mm(w.window_start_mm),
  length: mm(w.window_length_mm),
  domains: w.domains,
  dutyMean: w.duty_mean,
  dutySd: w.duty_sd,
  merged: w.merged,
});
