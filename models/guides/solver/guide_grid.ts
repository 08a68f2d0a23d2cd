// Pure: no I/O, no clock, no hidden randomness.
// The grid of a guide under a surface: dense where index and field vary, reaching as far as the field does.
import { type Axis, gradedNodes, type Segment } from "./axis.ts";
import type { GuideSection } from "./cross_section.ts";

/** Cells of the finest grid: sideways (half of the guide) and in depth with the cover. Multiples of 4. */
export interface GridCells {
  readonly x: number;
  readonly y: number;
}

export type Parity = "even" | "odd";

/** Decay lengths of the field that the grid holds in the cover: e^−10 at its end. */
const COVER_DECAYS = 10;
/** Share of the cells in depth that the cover gets, and the evenness of their steps in decay lengths. */
const COVER_SHARE = 0.15;
const COVER_SCALE = 3;

/** How a guide's grid is cut at its coarsest, to be refined by whole factors. */
export interface GridPlan {
  readonly x: readonly Segment[];
  readonly y: readonly Segment[];
  readonly parity: Parity;
}

/**
 * Plans the coarsest grid, a quarter of `cells` each way.
 * @param reach how far beyond the guide the grid goes into the crystal, m
 */
export function planGrid(
  section: GuideSection,
  lambda: number,
  parity: Parity,
  cells: GridCells,
  reach: number,
): GridPlan {
  for (const count of [cells.x, cells.y]) {
    if (!(Number.isSafeInteger(count) && count >= 16 && count % 4 === 0)) {
      throw new RangeError(
        `Cannot make a grid of ${cells.x} × ${cells.y} cells: need multiples of 4, at least 16`,
      );
    }
  }
  const { substrate, cover, scaleX, scaleY } = section;
  const edges = [0, ...section.edges.toSorted((a, b) => a - b)];
  const last = edges[edges.length - 1]!;
  const farX = last + 2 * scaleX + reach;
  const farY = 2 * scaleY + reach;
  // Cells in proportion to the length of each stretch in units of the scale, at least one each.
  const core = last / scaleX;
  const outside = Math.asinh((farX - last) / scaleX);
  const inner = edges.slice(1).map((far, k) =>
    segment(edges[k]!, far, (cells.x / 4) * (far - edges[k]!) / scaleX / (core + outside), Infinity)
  );
  const left = cells.x / 4 - inner.reduce((sum, { cells }) => sum + cells, 0);
  const x = [...inner, segment(last, farX, left, scaleX)];
  const decay = lambda / (2 * Math.PI * Math.sqrt(Math.max(substrate ** 2 - cover ** 2, 1e-3)));
  const above = Math.max(1, Math.round(COVER_SHARE * cells.y / 4));
  const y = [
    segment(0, -COVER_DECAYS * decay, above, COVER_SCALE * decay),
    segment(0, farY, cells.y / 4 - above, scaleY),
  ];
  return { x, y, parity };
}

const segment = (dense: number, far: number, cells: number, scale: number): Segment => ({
  dense,
  far,
  cells: Math.max(1, Math.round(cells)),
  scale,
});

/** The plan's axes with each cell split into `refine`. */
export function gridAxes(plan: GridPlan, refine: number): { x: Axis; y: Axis } {
  return {
    x: { nodes: gradedNodes(plan.x, refine), low: plan.parity === "even" ? "mirror" : "zero", high: "zero" },
    y: { nodes: gradedNodes(plan.y, refine), low: "zero", high: "zero" },
  };
}
