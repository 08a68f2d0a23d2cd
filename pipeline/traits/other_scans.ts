import { type OtherScan, otherScanTrait, type UsedTrait } from "../../models/decision/mod.ts";
import { toNm } from "../../shared/units.ts";
import type { ThreeWaves } from "../../shared/vocabulary.ts";
import type { GuideRecord } from "../records.ts";
import type { ResolvedGeometry } from "./geometry.ts";
import { wavesOf } from "./mismatch_spread.ts";
import type { ResolvedTrait, TraitPools } from "./pools.ts";

/** A trait that a scan of another process brings in, by its name in `used_traits`, with what is to be said of it. */
export type OtherScanRole = Omit<ResolvedTrait, "trait"> & { readonly trait: string; readonly note: string };

/**
 * Scans of other processes on a guide (of one process the nearest in wavelength), and what is expected of the guide without
 * them: what scans of that process on other guides suggest; the calculated index where the platform doesn't say how far it
 * may be off.
 * @param offset what is expected of the asked process; a scan of it leaves nothing for others to tell
 */
export function resolveOtherScans(
  pools: TraitPools,
  guide: GuideRecord,
  asked: ThreeWaves,
  offset: ResolvedTrait | null,
  { errors }: ResolvedGeometry,
): { readonly scans: readonly OtherScan[]; readonly told: readonly OtherScanRole[] } {
  const scans: OtherScan[] = [];
  const told: OtherScanRole[] = [];
  if (offset?.basis === "measured") return { scans, told };
  const fundamental_nm = Number(toNm(2 * asked.lambdaP).toFixed(6));
  const rows = pools.positions("mismatch_offset_per_m", guide.guide_id).map((k) => pools.rows[k]!);
  const processes = [...new Set(rows.map((row) => row.process!))].sort();
  for (const process of processes) {
    const far = (nm: number) => Math.abs(nm / fundamental_nm - 1);
    const nearest = rows.filter((row) => row.process === process).map((row) => row.wavelength_nm!)
      .reduce((a, b) => far(b) < far(a) ? b : a);
    const found = pools.offset(guide, process, nearest)!;
    const expected = pools.expectedOffset(guide, process, nearest);
    const waves = wavesOf(process, nearest);
    const trait = otherScanTrait(waves);
    const inScan = commonShares(pools, guide, errors, expected);
    const inAsked = commonShares(pools, guide, errors, offset);
    scans.push({
      waves,
      offset: used(found),
      expected: expected ?? { value: 0, u: 0 },
      read: expected?.shares === null || expected === null ? 0 : 1 - expected.shares.prior,
      shares: Object.fromEntries(errors.map(({ parameter }, i) => [parameter, {
        felt: 1 - inScan[i]!,
        own: 1 - Math.max(inScan[i]!, inAsked[i]!),
      }])),
    });
    told.push({ ...found, trait, note: "of another process: acts by the errors of the cross-section" });
    if (expected !== null) {
      told.push({
        ...expected,
        trait: `${process} expected_offset_per_m`,
        note: "what the scan is compared with",
      });
    }
  }
  return { scans, told };
}

const used = ({ value, u, basis, key }: ResolvedTrait): UsedTrait => ({ value, u, basis, key });

/**
 * Per parameter, the share of its error's variance that an offset pooled from other guides' scans holds already: these guides
 * are as wide or as thick as this one by what they have in common. Σ weight·covariance/u², weights by how near the scans are,
 * as the scans' own sensitivities are taken to be this guide's.
 */
function commonShares(
  pools: TraitPools,
  guide: GuideRecord,
  errors: ResolvedGeometry["errors"],
  offset: ResolvedTrait | null,
): number[] {
  const weights = offset?.shares ?? null;
  return errors.map(({ resolved }) => {
    if (weights === null || resolved.u === 0) return 0;
    const near = covariances(pools, guide, resolved);
    const common = weights.die * near.die + weights.wafer * near.wafer + weights.lot * near.lot;
    return Math.min(1, Math.max(0, common / resolved.u ** 2));
  });
}

/**
 * Covariance of a parameter's error with that of guides of the same die, of other dies and of other wafers. A guide of the die
 * that nobody read has the variance V + g², g the spread of guides: V is what the die's guides have in common, and less the
 * spread of dies, then of wafers, what other dies have, as long as no reading of the die (the wafer) itself is in V; with one
 * V is taken, which is the more. A guide that was read, u² = κg² + κ²V, leans on its die by κ.
 */
function covariances(pools: TraitPools, guide: GuideRecord, { trait, u }: ResolvedTrait) {
  const pooled = trait as Parameters<TraitPools["estimate"]>[0];
  const unread = pools.estimate(pooled, { ...guide, guide_id: "" }, null, null)!;
  const spread = pools.spreads(pooled);
  const less = (v: number, ...sds: number[]) => Math.max(0, sds.reduce((left, sd) => left - sd * sd, v));
  const g2 = spread.guideSd ** 2;
  const die = less(unread.u ** 2, spread.guideSd);
  const wafer = unread.basis === "die" ? die : less(die, spread.dieSd);
  const lot = unread.basis === "die" || unread.basis === "wafer" ? wafer : less(wafer, spread.waferSd);
  const lean = die === 0 ? 1 : Math.min(1, (Math.sqrt(g2 * g2 + 4 * die * u * u) - g2) / (2 * die));
  return { die: lean * die, wafer: lean * wafer, lot: lean * lot };
}
