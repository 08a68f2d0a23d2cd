import type { Ledger, Manifest } from "../ledger/mod.ts";
import { MODEL_VERSION } from "../model_version.ts";
import type { LoadedPlatform } from "../platforms.ts";
import { recordsOf } from "../records.ts";
import { loadTraits } from "./load_traits.ts";
import type { TraitRow } from "./trait_row.ts";

/** Another lot of the same platform: its readings tell how far lots, wafers, dies and guides differ. */
export interface OtherLot {
  readonly lot: string;
  readonly rows: readonly TraitRow[];
  /** Centres of its dies, mm, by full id. */
  readonly places: Places;
}

/** Centres of dies from the centre of their wafer, mm, by full id. */
export type Places = ReadonlyMap<string, { readonly x: number; readonly y: number }>;

export const placesOf = (
  guides: readonly { readonly die_id: string; readonly x_mm: number; readonly y_mm: number }[],
): Places => new Map(guides.map((g) => [g.die_id, { x: g.x_mm, y: g.y_mm }]));

interface ReduceParameters {
  readonly platform: string;
  readonly platform_sha256: string;
}

/**
 * Runs of traits in force that are pooled together, by lot: those of one platform's lots, reduced with its present content
 * and by this model. Lots reduced otherwise would bring differences that no wafer has.
 */
export async function pooledRuns(ledger: Ledger, loaded: LoadedPlatform): Promise<Manifest[]> {
  return (await ledger.runsInForce("reduce"))
    .filter((run) => {
      const { platform, platform_sha256 } = run.parameters as ReduceParameters;
      return run.model === MODEL_VERSION && platform === loaded.platform.platform &&
        platform_sha256 === loaded.fingerprint;
    })
    .sort((a, b) => a.lot! < b.lot! ? -1 : 1);
}

/** Traits and die places of the lots of some runs. */
export async function loadOtherLots(ledger: Ledger, runs: readonly Manifest[]): Promise<OtherLot[]> {
  const out: OtherLot[] = [];
  for (const run of runs) {
    const lot = run.lot!;
    out.push({
      lot,
      rows: await loadTraits(ledger, run),
      places: placesOf(await recordsOf(ledger, "guides", lot)),
    });
  }
  return out;
}
