import { LedgerError } from "../../shared/errors.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { Platform } from "../../shared/schemas/platform.ts";
import type { Ledger, Manifest } from "../ledger/mod.ts";
import { type GuideRecord, type LotDesign, recordsOf } from "../records.ts";
import { type ResolvedGuide, resolveGuide, type RoleTrait, windowsByUnit } from "../traits/guide_traits.ts";
import { alongGuides } from "../traits/along_guide.ts";
import { completeWalls } from "../traits/guide_walls.ts";
import type { OtherLot } from "../traits/pooled_lots.ts";
import { TraitPools } from "../traits/pools.ts";
import type { TraitRow } from "../traits/trait_row.ts";

/** A row of `used_traits`: what the prediction of a guide wrote down of one trait. */
export interface StoredRole extends Omit<RoleTrait, "from" | "used" | "refs" | "shares"> {
  readonly from_unit: string;
  readonly readings_used: number;
  readonly share_own: number | null;
  readonly share_die: number | null;
  readonly share_wafer: number | null;
  readonly share_lot: number | null;
  readonly share_other_lots: number | null;
  readonly share_platform: number | null;
}

/** A stored trait together with the trait rows and readings under it. */
export interface FollowedRole extends StoredRole {
  /** Positions of the trait rows used. */
  readonly used: readonly number[];
  readonly refs: RoleTrait["refs"];
  /** False when what it rests on could not be told. */
  readonly followed: boolean;
}

/** Rows of a run's table that belong to one guide. */
export async function rowsOfGuide<T>(
  ledger: Ledger,
  run: Manifest,
  table: string,
  guide: string,
): Promise<T[]> {
  const out: T[] = [];
  for await (const batch of ledger.streamTable(run, table)) {
    const ids = batch.getChild("guide_id")!;
    const columns = batch.schema.fields.map((f) => [f.name, batch.getChild(f.name)!] as const);
    for (let k = 0; k < batch.numRows; k++) {
      if (ids.get(k) !== guide) continue;
      out.push(Object.fromEntries(columns.map(([name, column]) => [name, column.get(k)])) as T);
    }
  }
  return out;
}

/**
 * Resolves a guide's traits again, with the code that predicting uses.
 * @param past the ledger as it stood when the figures were predicted
 */
export async function deriveGuide(
  past: Ledger,
  design: LotDesign,
  traits: readonly TraitRow[],
  platform: Platform,
  checked: CheckedRequest,
  guide: GuideRecord,
  others: readonly OtherLot[],
): Promise<ResolvedGuide> {
  const { lot } = design.lot;
  const pools = new TraitPools(platform, design, traits, others);
  const windows = windowsByUnit(await recordsOf(past, "poling", lot));
  const file = completeWalls(traits).get(guide.guide_id);
  const walls = file === undefined ? null : await wallsOf(past, lot, guide.guide_id, file);
  const along = alongGuides(await recordsOf(past, "geometry", lot), platform);
  const { inputs, roles } = resolveGuide(pools, windows, guide, checked, walls, along);
  // A wall list read again makes the earlier one a trait row, too; only the list that was integrated is under the figure.
  const narrowed = roles.map((role) =>
    role.trait === "walls"
      ? { ...role, used: role.used.filter((k) => traits[k]!.readings[0]!.file_name === file) }
      : role
  );
  return { inputs, roles: narrowed };
}

async function wallsOf(past: Ledger, lot: string, guide: string, file: string): Promise<Float64Array> {
  const columns = ["guide_id", "file_name", "positions_um"];
  const positions: number[] = [];
  for await (const batch of past.streamActive("walls", lot, { columns })) {
    const [ids, files, lists] = columns.map((c) => batch.getChild(c)!);
    for (let k = 0; k < batch.numRows; k++) {
      if (ids!.get(k) !== guide || files!.get(k) !== file) continue;
      for (const z of lists!.get(k)?.toArray() as Float64Array | undefined ?? []) positions.push(z);
    }
  }
  return Float64Array.from(positions);
}

const SAME = ["role", "trait", "wavelength_nm", "polarisation", "basis", "distance", "note"] as const;

const SHARES = [
  ["share_own", "own"],
  ["share_die", "die"],
  ["share_wafer", "wafer"],
  ["share_lot", "lot"],
  ["share_other_lots", "lots"],
  ["share_platform", "prior"],
] as const;

/**
 * Puts derived traits beside the stored ones.
 * @param exact whether platform and model are those of the prediction: then every value must be the stored one, bit for bit
 * @throws LedgerError when it is not
 */
export function followRoles(
  stored: readonly StoredRole[],
  derived: readonly RoleTrait[],
  exact: boolean,
  run: string,
): FollowedRole[] {
  if (exact && stored.length !== derived.length) {
    throw new LedgerError(
      `Cannot trace: run ${run} holds ${stored.length} traits of the guide, resolving them again gives ${derived.length}`,
    );
  }
  return stored.map((row, k) => {
    const again = derived[k];
    const problem = again === undefined ? "missing" : difference(row, again, exact);
    if (problem === null) return { ...row, used: again!.used, refs: again!.refs, followed: true };
    if (exact) {
      throw new LedgerError(
        `Cannot trace: ${row.trait} as ${row.role} is not what run ${run} used: ${problem}; ` +
          `if the program was changed since, run predict again`,
      );
    }
    return { ...row, used: [], refs: [], followed: row.readings_used === 0 };
  });
}

/** What differs; without `exact` the values may (they depend on the platform), but not what they are made of. */
function difference(stored: StoredRole, again: RoleTrait, exact: boolean): string | null {
  const said = (name: string, a: unknown, b: unknown) => `${name} was ${a}, is ${b}`;
  for (const name of SAME) {
    if (!Object.is(stored[name], again[name])) return said(name, stored[name], again[name]);
  }
  const count = again.used.length + again.refs.length;
  // Of walls, `used` is narrowed to the list that was integrated.
  if (stored.readings_used !== count && stored.trait !== "walls") {
    return said("the number of readings", stored.readings_used, count);
  }
  if (stored.from_unit !== again.from) return said("its unit", stored.from_unit, again.from);
  if (!exact) return null;
  for (const name of ["value", "u"] as const) {
    if (!Object.is(stored[name], again[name])) return said(name, stored[name], again[name]);
  }
  for (const [name, share] of SHARES) {
    const now = again.shares?.[share] ?? null;
    if (!Object.is(stored[name], now)) return said(name, stored[name], now);
  }
  return null;
}
