import {
  bandForPeak,
  type Grating,
  gratingFromWalls,
  gratingSpectrum,
  mainPeaks,
} from "../../models/poling/mod.ts";
import { mm, um } from "../../shared/units.ts";
import { designsFor, type SolveSetting } from "../designs/mod.ts";
import { sha256 } from "../json_file.ts";
import { type Ledger, type Manifest, type TableStream, tableStream } from "../ledger/mod.ts";
import { buildModel, loadPlatform } from "../platforms.ts";
import { loadDesign } from "../records.ts";
import { MODEL_VERSION } from "../model_version.ts";
import { OutOfDate } from "../out_of_date.ts";
import { alongGuides } from "../traits/along_guide.ts";
import { streamWalls } from "../traits/guide_walls.ts";
import { TraitPools } from "../traits/pools.ts";
import { REDUCE_REMARK_SHAPE, type ReduceRemark, TRAIT_SHAPE, type TraitRow } from "../traits/trait_row.ts";
import { reduceGeometry } from "./geometry.ts";
import { loadReadings, type LotReadings, type Reduced, unknownUncertainties } from "./lot_readings.ts";
import { reduceCutback, reduceFringes } from "./loss.ts";
import { reduceFacets, reduceModes } from "./optics.ts";
import { reducePoling, reduceWalls } from "./poling.ts";
import { reduceTuning, type WallPeak, type WallPeaks } from "./tuning.ts";

export interface ReduceResult {
  readonly run: Manifest;
  /** False when nothing had changed and nothing was computed. */
  readonly computed: boolean;
  readonly remarks: readonly ReduceRemark[];
}

/**
 * Reduces the readings in force of a lot to traits with standard uncertainty and the readings used. Nothing is computed
 * when files, platform and model are those of the last time.
 * @param ledger open for writing
 * @throws InputError for an unknown lot or platform
 */
export async function reduceLot(
  ledger: Ledger,
  lot: string,
  platforms?: string,
  solving: SolveSetting = {},
): Promise<ReduceResult> {
  const design = await loadDesign(ledger, lot);
  const loaded = await loadPlatform(design.lot.platform, platforms);
  const files = await ledger.activeFiles(lot);
  const fingerprint = sha256(JSON.stringify([
    "reduce",
    MODEL_VERSION,
    loaded.fingerprint,
    files.map((f) => [f.name, f.sha256, f.run]),
  ]));
  const held = await ledger.findRun({ kind: "reduce", lot, fingerprint });
  if (held !== null) return { run: held, computed: false, remarks: [] };
  if (!ledger.writable) throw new OutOfDate(`the traits of lot ${lot}`);
  const { designs, runs } = await designsFor(
    ledger,
    loaded,
    design.guides.map((g) => g.width_um),
    [],
    solving,
  );
  const readings = await loadReadings(ledger, design, loaded.platform, buildModel({ ...loaded, designs }));
  const along = alongGuides(readings.geometry, loaded.platform);
  const walls = await walkWalls(ledger, readings);
  const geometry = reduceGeometry(readings);
  const parts: Reduced[] = [
    reduceCutback(readings),
    reduceFringes(readings),
    reduceModes(readings),
    reduceFacets(readings),
    reducePoling(readings),
    walls.reduced,
    geometry,
    // A scan's offset is what is left beside the geometry, as the prediction will know it.
    reduceTuning(readings, walls.peaks, new TraitPools(loaded.platform, design, geometry.traits), along),
  ];
  const remarks = [...unknownUncertainties(readings), ...parts.flatMap((p) => p.remarks)];
  const run = await ledger.commit({
    kind: "reduce",
    lot,
    inputs: [],
    parents: [...new Set(files.map((f) => f.run)), ...runs],
    parameters: { platform: design.lot.platform, platform_sha256: loaded.fingerprint },
    modelVersion: MODEL_VERSION,
    fingerprint,
    tables: {
      traits: traitTable(lot, parts.flatMap((p) => p.traits)),
      reduce_remarks: remarkTable(lot, remarks),
    },
  });
  return { run, computed: true, remarks };
}

/** One pass over the wall lists: their statistics, and the peaks that tuning scans of the same guides are held against. */
async function walkWalls(
  ledger: Ledger,
  readings: LotReadings,
): Promise<{ reduced: Reduced; peaks: WallPeaks }> {
  const scanned = new Set(readings.tuning.map((r) => r.guide_id));
  const reduced: Reduced = { traits: [], remarks: [] };
  const peaks = new Map<string, WallPeak>();
  for await (const walls of streamWalls(ledger, readings.lot)) {
    const { traits, remarks } = reduceWalls(readings, walls);
    reduced.traits.push(...traits);
    reduced.remarks.push(...remarks);
    const complete = traits.some((t) => t.trait === "walls_complete" && t.value === 1);
    if (complete && scanned.has(walls.guide_id)) {
      const { peak, grating } = peakOf(readings, walls.guide_id, walls.positions_um);
      if (peak !== null) peaks.set(walls.guide_id, { deltaBeta: peak, refs: walls.refs, grating });
    }
  }
  return { reduced, peaks };
}

/** |Δβ|·scale (1/m) at the peak of a guide's |φ|², which is even in Δβ: the domains' signs are real. */
function peakOf(
  readings: LotReadings,
  guideId: string,
  positions: Float64Array,
): { peak: number | null; grating: Grating } {
  const guide = readings.design.guideById.get(guideId)!;
  const period = um(guide.period_um);
  const poledLength = mm(guide.poled_length_mm);
  const grating = gratingFromWalls(positions.map(um), {
    poledFrom: mm(guide.poled_from_mm),
    poledLength,
    period,
    guideLength: mm(guide.length_mm),
  });
  const vector = 2 * Math.PI / period;
  const spectrum = gratingSpectrum(
    grating,
    bandForPeak(vector, vector, period, grating.end - grating.start),
    { poledLength },
  );
  return { peak: mainPeaks(spectrum)[0]?.deltaBeta ?? null, grating };
}

function traitTable(lot: string, rows: readonly TraitRow[]): TableStream {
  const column = <K extends keyof TraitRow>(name: K) => rows.map((r) => r[name]);
  return tableStream(TRAIT_SHAPE, {
    lot: rows.map(() => lot),
    trait: column("trait"),
    scope: column("scope"),
    unit: column("unit"),
    wafer: column("wafer"),
    die_id: column("die_id"),
    guide_id: column("guide_id"),
    width_um: column("width_um"),
    wavelength_nm: column("wavelength_nm"),
    polarisation: column("polarisation"),
    process: column("process"),
    value: column("value"),
    u: column("u"),
    u_pooled: rows.map((r) => r.u_pooled ?? null),
    counted: rows.map((r) => r.counted ?? null),
    u_from: column("u_from"),
    method: column("method"),
    readings: rows.map((r) => JSON.stringify(r.readings)),
    detail: column("detail"),
  });
}

function remarkTable(lot: string, remarks: readonly ReduceRemark[]): TableStream {
  return tableStream(REDUCE_REMARK_SHAPE, {
    lot: remarks.map(() => lot),
    code: remarks.map((r) => r.code),
    unit: remarks.map((r) => r.unit),
    statement: remarks.map((r) => r.statement),
  });
}
