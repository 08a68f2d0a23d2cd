import {
  type ChangedDesign,
  changedDesigns,
  platformDesign,
  type PlatformModel,
  type ProcessNudge,
} from "../../models/decision/mod.ts";
import {
  type DesignAreas,
  designTable,
  type PolarisationTable,
  type SolverDesign,
  TABLE_GRID,
  type WidthScan,
} from "../../models/guides/mod.ts";
import type { Polarisation, ThreeWaves } from "../../shared/vocabulary.ts";
import type { Ledger } from "../ledger/mod.ts";
import { buildModel, type LoadedPlatform } from "../platforms.ts";
import { piecesFor, type SolveSetting } from "./pieces.ts";
import type { DesignTask } from "./tasks.ts";

/** The platform as it would be with one parameter of its process a little off, for guides as drawn. */
export interface ChangedModel extends ProcessNudge {
  readonly model: PlatformModel;
}

/**
 * Models of a platform whose process is off, per drawn width (µm): modes and areas of every changed design, solved and
 * kept as those of the designs are. A platform without solved modes has none.
 * @throws OutOfDate when something has to be solved and the ledger is open for reading only
 */
export async function changedModels(
  ledger: Ledger | null,
  loaded: LoadedPlatform,
  widths_um: readonly number[],
  waves: ThreeWaves,
  setting: SolveSetting = {},
): Promise<ReadonlyMap<number, readonly ChangedModel[]>> {
  const { platform } = loaded;
  const { index } = platform;
  if (index.from !== "solver") return new Map();
  const pols = [...new Set<Polarisation>([waves.polP, waves.polS, waves.polI])];
  const perWidth = widths_um.map((width) => ({
    width,
    changed: changedDesigns(platformDesign(platform, index, width), index),
  }));
  const tasksOf = ({ design }: ChangedDesign): DesignTask[] => [
    ...pols.map((pol) => ({ kind: "modes" as const, design, pol })),
    { kind: "areas", design, waves },
  ];
  const all = perWidth.flatMap(({ changed }) => changed.flatMap(tasksOf));
  const { results } = await piecesFor(ledger, platform.platform, all, setting);
  let next = 0;
  const modelOf = (design: SolverDesign): PlatformModel => {
    const notAsked = { reason: "not asked for" };
    const tables: Record<Polarisation, PolarisationTable | { readonly reason: string }> = {
      TE: notAsked,
      TM: notAsked,
    };
    for (const pol of pols) tables[pol] = results[next++] as PolarisationTable | { readonly reason: string };
    const areas = results[next++] as DesignAreas;
    const table = designTable(design, setting.grid ?? TABLE_GRID, tables);
    return buildModel({ ...loaded, designs: { tables: [table], areas: [areas], outputs: [] } });
  };
  return new Map(
    perWidth.map(({ width, changed }) => [
      width,
      changed.map(({ parameter, by, design }) => ({ parameter, by, model: modelOf(design) })),
    ]),
  );
}

/** Widths are looked through from and to these multiples of the drawn one. */
const WIDTHS_FROM = 0.5;
const WIDTHS_TO = 2;

/** How Δβ follows the width far beyond a design's table, per drawn width (µm). Otherwise as {@link changedModels}. */
export async function widthScans(
  ledger: Ledger | null,
  { platform }: LoadedPlatform,
  widths_um: readonly number[],
  waves: ThreeWaves,
  setting: SolveSetting = {},
): Promise<ReadonlyMap<number, WidthScan>> {
  const { index } = platform;
  if (index.from !== "solver") return new Map();
  const tasks = widths_um.map((width): DesignTask => ({
    kind: "widths",
    design: platformDesign(platform, index, width),
    waves,
    range_um: [WIDTHS_FROM * width, WIDTHS_TO * width],
  }));
  const { results } = await piecesFor(ledger, platform.platform, tasks, setting);
  return new Map(widths_um.map((width, k) => [width, results[k] as WidthScan]));
}
