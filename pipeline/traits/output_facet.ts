import { coatedReflectivity, isRefused } from "../../models/metrology/mod.ts";
import type { FacetTrait } from "../../models/decision/mod.ts";
import { InputError } from "../../shared/errors.ts";
import { nm } from "../../shared/units.ts";
import type { Polarisation } from "../../shared/vocabulary.ts";
import type { GuideRecord } from "../records.ts";
import { defaultOf } from "./platform_defaults.ts";
import type { ResolvedTrait, TraitPools } from "./pools.ts";

/** A facet as the models take it, and the trait behind it; none for a bare one. */
export interface OutputFacet {
  readonly facet: FacetTrait;
  readonly resolved: ResolvedTrait | null;
}

/**
 * The output facet of a guide at a wavelength (nm): bare, or coated with the run's spectrum, or coated with the platform's
 * default where the spectrum does not reach. Facets are known by the die's coating record: basis `die`.
 */
export function outputFacetOf(
  pools: Pick<TraitPools, "platform" | "design" | "rows" | "positions">,
  guide: GuideRecord,
  wavelength_nm: number,
  polarisation: Polarisation,
): OutputFacet {
  const { platform, design } = pools;
  const coating = design.coatingOf.get(`${guide.die_id}|out`);
  if (coating === undefined) return { facet: { state: "bare", basis: "die" }, resolved: null };
  const unit = `${coating.coating_run}|out`;
  const positions = pools.positions("reflectivity", unit);
  const readings = positions.map((k) => pools.rows[k]!)
    .map((r) => ({ lambda: nm(r.wavelength_nm!), reflectivity: r.value, u: r.u }));
  const found = coatedReflectivity(readings, nm(wavelength_nm));
  const common = {
    trait: "reflectivity" as const,
    polarisation: null,
    wavelength_nm,
    otherWidth: false,
    shares: null,
  };
  if (!isRefused(found)) {
    const used = found.used.map((k) => positions[k]!);
    const resolved: ResolvedTrait = {
      ...common,
      value: found.value,
      u: found.u,
      basis: "die",
      key: `reflectivity|${unit}|${wavelength_nm}`,
      distance: null,
      from: coating.coating_run,
      used,
    };
    return { facet: { state: "coated", reflectivity: resolved }, resolved };
  }
  const fallback = defaultOf(platform, "coated_reflectivity", polarisation);
  if (fallback === null) {
    throw new InputError(
      `Platform ${platform.platform} gives no default for coated_reflectivity, and coating run ` +
        `${coating.coating_run} says nothing at ${
          wavelength_nm.toFixed(1)
        } nm (${found.refused}): add it to "defaults"`,
      { column: "defaults.coated_reflectivity" },
    );
  }
  const resolved: ResolvedTrait = {
    ...common,
    value: fallback.value,
    u: fallback.u,
    basis: "platform",
    // One coating, one error: the polarisations part only where the platform tells them apart.
    key: `reflectivity|platform|${wavelength_nm}|${fallback.value}|${fallback.u}`,
    distance: null,
    from: platform.platform,
    used: [],
  };
  return { facet: { state: "coated", reflectivity: resolved }, resolved };
}
