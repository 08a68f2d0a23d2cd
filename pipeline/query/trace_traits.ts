import type { Role } from "../../models/decision/mod.ts";
import type { Ledger } from "../ledger/mod.ts";
import type { TraitRow } from "../traits/trait_row.ts";
import { ReadingRows } from "./trace_readings.ts";
import type { FollowedRole } from "./trace_roles.ts";
import type { TracedDefault, TracedShares, TracedTrait } from "./trace_types.ts";

/** Traits in the roles of a figure, each with its trait rows and their readings. */
export async function tracedTraits(
  past: Ledger,
  lot: string,
  roles: readonly Role[],
  followed: readonly FollowedRole[],
  traits: readonly TraitRow[],
  platform: string,
): Promise<TracedTrait[]> {
  const refs = followed.flatMap((f) => [...f.used.flatMap((k) => traits[k]!.readings), ...f.refs]);
  const rows = await ReadingRows.load(past, lot, refs);
  return roles.flatMap((role): TracedTrait[] => {
    const own = followed.filter((f) => f.role === role);
    if (own.length === 0) return [unread(role, platform)];
    return own.map((f) => ({
      role,
      trait: f.trait,
      value: f.value,
      u: f.u,
      basis: f.basis,
      from: f.from_unit,
      wavelength_nm: f.wavelength_nm,
      polarisation: f.polarisation,
      distance: f.distance,
      note: f.note,
      readings_used: f.readings_used,
      shares: sharesOf(f),
      measured: f.used.map((k) => {
        const t = traits[k]!;
        return {
          trait: t.trait,
          scope: t.scope,
          unit: t.unit,
          width_um: t.width_um,
          wavelength_nm: t.wavelength_nm,
          polarisation: t.polarisation,
          process: t.process,
          method: t.method,
          value: t.value,
          u: t.u,
          u_from: t.u_from,
          detail: t.detail,
          readings: t.readings.flatMap((ref) => rows.resolve(ref, t.trait)),
        };
      }),
      readings: f.refs.flatMap((ref) => rows.resolve(ref, f.trait)),
    }));
  });
}

const sharesOf = (f: FollowedRole): TracedShares | null =>
  f.share_own === null ? null : {
    own: f.share_own,
    die: f.share_die!,
    wafer: f.share_wafer!,
    lot: f.share_lot!,
    other_lots: f.share_other_lots!,
    platform: f.share_platform!,
  };

/** A role that no trait fills: the model's own value stands, or none. */
function unread(role: Role, platform: string): TracedTrait {
  const [trait, note] = role === "phase_matching"
    ? ["mismatch", "no scan speaks for this guide: calculated from the platform's index and the design"]
    : ["none", "neither read nor given by the platform"];
  return {
    role,
    trait,
    value: null,
    u: null,
    basis: "platform",
    from: platform,
    wavelength_nm: null,
    polarisation: null,
    distance: null,
    note,
    readings_used: 0,
    shares: null,
    measured: [],
    readings: [],
  };
}

/** Defaults of the platform among the traits, each once. */
export function defaultsOf(roles: readonly FollowedRole[], platform: string): TracedDefault[] {
  const byKey = new Map<string, TracedDefault & { roles: Role[] }>();
  for (const { role, trait, wavelength_nm, polarisation, value, u, basis, from_unit } of roles) {
    if (basis !== "platform" || from_unit !== platform) continue;
    const name = trait === "reflectivity" ? "coated_reflectivity" : trait;
    const key = JSON.stringify([name, wavelength_nm, polarisation]);
    const held = byKey.get(key);
    if (held === undefined) {
      byKey.set(key, { default: name, wavelength_nm, polarisation, value, u, roles: [role] });
    } else if (!held.roles.includes(role)) held.roles.push(role);
  }
  return [...byKey.values()];
}
