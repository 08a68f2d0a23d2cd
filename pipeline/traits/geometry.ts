import { GEOMETRY_PARAMETERS, type GeometryParameter } from "../../models/guides/mod.ts";
import type { GuideGeometry } from "../../shared/vocabulary.ts";
import type { GuideRecord } from "../records.ts";
import type { ResolvedTrait, TraitPools } from "./pools.ts";

/** A guide's cross-section as far as readings and platform tell, and what is uncertain about it. */
export interface ResolvedGeometry {
  readonly geometry: GuideGeometry;
  readonly errors: readonly { readonly parameter: GeometryParameter; readonly resolved: ResolvedTrait }[];
}

/**
 * The geometry that both reducing (a scan's offset is what is left beside it) and predicting ask the index with: the width
 * as drawn with its error, the other parameters as read, pooled or given by the platform. A parameter that nobody speaks of
 * stays with the index model's nominal value.
 */
export function resolveGeometry(pools: TraitPools, guide: GuideRecord): ResolvedGeometry {
  const geometry: { -readonly [K in keyof GuideGeometry]: GuideGeometry[K] } = { width_um: guide.width_um };
  const errors: { parameter: GeometryParameter; resolved: ResolvedTrait }[] = [];
  for (const parameter of GEOMETRY_PARAMETERS) {
    const trait = parameter === "width_um" ? "width_error_um" : parameter;
    const resolved = pools.estimate(trait, guide, null, null);
    if (resolved === null) continue;
    geometry[parameter] = parameter === "width_um" ? guide.width_um + resolved.value : resolved.value;
    errors.push({ parameter, resolved });
  }
  return { geometry, errors };
}
