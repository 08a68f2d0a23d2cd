// Lots drawn from stated priors, as the simulation checks of the pooling take them.
import type { LotObservation, Place, Spread } from "../../../models/pooling/mod.ts";
import type { Random } from "../../../shared/random.ts";

export interface Layout {
  readonly lots: number;
  /** Wafers of a lot, and how many of them are read. */
  readonly wafers: number;
  readonly wafersRead: number;
  readonly dies: number;
  readonly diesRead: number;
  readonly guides: number;
  readonly guidesRead: number;
  /** Standard uncertainty of a reading: uniform between these. */
  readonly u: readonly [number, number];
}

export interface Truth {
  readonly mean: number;
  readonly spread: Spread;
  /** Contribution of a trend at a place on the wafer. */
  readonly trend?: (place: Place) => number;
}

export interface SimulatedGuide {
  readonly wafer: string;
  readonly die: string;
  readonly guide: string;
  readonly lot: string;
  readonly truth: number;
}

export interface Simulated {
  readonly observations: LotObservation[];
  readonly places: Map<string, Place>;
  readonly guides: SimulatedGuide[];
}

/** A standard deviation drawn from the log-normal prior with root mean square `sd` and this spread of its logarithm. */
export const drawnSd = (sd: number, logSd: number, random: Random): number =>
  Math.exp(Math.log(sd) - logSd ** 2 + logSd * random.normal());

/** Lots `L0`, `L1` …; the first wafers, dies and guides are the ones read. Dies stand on a square grid. */
export function simulateLots(layout: Layout, { mean, spread, trend }: Truth, random: Random): Simulated {
  const out: Simulated = { observations: [], places: new Map(), guides: [] };
  const side = Math.ceil(Math.sqrt(layout.dies));
  for (let l = 0; l < layout.lots; l++) {
    const lot = `L${l}`;
    const ofLot = mean + spread.lotSd * random.normal();
    for (let w = 0; w < layout.wafers; w++) {
      const wafer = `${lot}-${w}`;
      const ofWafer = ofLot + spread.waferSd * random.normal();
      // Which dies are read must not always be the same corner of the wafer.
      const order = shuffled(layout.dies, random);
      for (let d = 0; d < layout.dies; d++) {
        const die = `${wafer}/${d}`;
        const spot = order[d]!;
        const place = { x: spot % side - (side - 1) / 2, y: Math.floor(spot / side) - (side - 1) / 2 };
        out.places.set(die, place);
        const ofDie = ofWafer + spread.dieSd * random.normal() + (trend?.(place) ?? 0);
        for (let g = 0; g < layout.guides; g++) {
          const guide = `${die}/g${g}`;
          const truth = ofDie + spread.guideSd * random.normal();
          out.guides.push({ lot, wafer, die, guide, truth });
          if (w >= layout.wafersRead || d >= layout.diesRead || g >= layout.guidesRead) continue;
          const u = layout.u[0] + (layout.u[1] - layout.u[0]) * random.uniform();
          const value = truth + u * random.normal();
          out.observations.push({ lot, wafer, die, guide, value, u, index: out.observations.length });
        }
      }
    }
  }
  return out;
}

function shuffled(n: number, random: Random): number[] {
  const order = Array.from({ length: n }, (_, i) => i);
  for (let i = n - 1; i > 0; i--) {
    const j = random.below(i + 1);
    [order[i], order[j]] = [order[j]!, order[i]!];
  }
  return order;
}
