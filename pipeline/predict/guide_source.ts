import type { GuideInputs } from "../../models/decision/mod.ts";
import type { CheckedRequest } from "../../shared/schemas/request.ts";
import type { Ledger } from "../ledger/mod.ts";
import { type LotDesign, recordsOf } from "../records.ts";
import type { AlongByGuide } from "../traits/along_guide.ts";
import { alongGuides } from "../traits/along_guide.ts";
import { resolveGuide, type RoleTrait, type WindowsByUnit, windowsByUnit } from "../traits/guide_traits.ts";
import { completeWalls, streamWalls } from "../traits/guide_walls.ts";
import type { TraitPools } from "../traits/pools.ts";

/** What one guide's prediction for one request rests on, by their positions. */
export interface SourcedGuide {
  readonly guide: number;
  readonly request: number;
  readonly inputs: GuideInputs;
  readonly roles: readonly RoleTrait[];
}

/** Resolves guides of a lot as often as they are asked for; walls are read again, not kept. */
export class GuideSource {
  readonly #walls: ReadonlyMap<string, string>;

  private constructor(
    readonly ledger: Ledger,
    readonly design: LotDesign,
    readonly pools: TraitPools,
    readonly windows: WindowsByUnit,
    readonly along: AlongByGuide,
  ) {
    this.#walls = completeWalls(pools.rows);
  }

  static async open(ledger: Ledger, design: LotDesign, pools: TraitPools): Promise<GuideSource> {
    const { lot } = design.lot;
    const windows = windowsByUnit(await recordsOf(ledger, "poling", lot));
    const along = alongGuides(await recordsOf(ledger, "geometry", lot), pools.platform);
    return new GuideSource(ledger, design, pools, windows, along);
  }

  /**
   * Guides for requests: first those without a list of walls, then the others as their lists are read.
   * @param wanted positions of the requests that each guide is asked for, by the guide's position
   */
  async *guides(
    wanted: ReadonlyMap<number, readonly number[]>,
    requests: readonly CheckedRequest[],
  ): AsyncGenerator<SourcedGuide> {
    const { guides } = this.design;
    const resolved = function* (source: GuideSource, guide: number, walls: Float64Array | null) {
      for (const request of wanted.get(guide) ?? []) {
        const { pools, windows, along } = source;
        yield {
          guide,
          request,
          ...resolveGuide(pools, windows, guides[guide]!, requests[request]!, walls, along),
        };
      }
    };
    const listed = new Map<string, number>();
    for (const [guide, { guide_id }] of guides.entries()) {
      if (!wanted.has(guide)) continue;
      if (this.#walls.has(guide_id)) listed.set(guide_id, guide);
      else yield* resolved(this, guide, null);
    }
    if (listed.size === 0) return;
    for await (const walls of streamWalls(this.ledger, this.design.lot.lot)) {
      const guide = listed.get(walls.guide_id);
      if (guide === undefined || this.#walls.get(walls.guide_id) !== walls.refs[0]!.file_name) continue;
      yield* resolved(this, guide, walls.positions_um);
    }
  }
}
