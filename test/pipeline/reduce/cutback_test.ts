import { deepEqual, equal, match, ok } from "node:assert/strict";
import { reduceCutback } from "../../../pipeline/reduce/loss.ts";
import type { LotReadings } from "../../../pipeline/reduce/lot_readings.ts";
import type { CutbackRecord } from "../../../pipeline/records.ts";
import { assertClose } from "../../assert_close.ts";
import { guideRecord, lotDesign } from "../traits/a_lot.ts";

const GUIDES = ["A-1/01/g1", "A-1/01/g2", "A-1/01/g3", "A-1/02/g1"].map((id) => guideRecord(id));
let line = 1;
/** A reading of a guide, or of a whole die; losses in dB, lengths in mm. */
function reading(
  unit: string,
  length_mm: number,
  insertion_loss_db: number,
  over: Partial<CutbackRecord> = {},
): CutbackRecord {
  const [wafer, die, guide] = unit.split("/");
  return {
    file_name: "readings/cutback.csv",
    source_file: "00",
    source_line: ++line,
    scope: guide === undefined ? "die" : "guide",
    unit,
    wafer: wafer!,
    die_id: `${wafer}/${die}`,
    guide_id: guide === undefined ? null : unit,
    wavelength_nm: 1550,
    polarisation: "TE",
    length_mm,
    insertion_loss_db,
    u_insertion_loss_db: 0.01,
    ...over,
  };
}
const reduce = (cutback: CutbackRecord[], u_insertion_loss_db?: number) =>
  reduceCutback({
    cutback,
    design: lotDesign({}, GUIDES),
    platform: { defaults: { u_insertion_loss_db } },
  } as unknown as LotReadings);
const losses = (reduced: ReturnType<typeof reduce>) => reduced.traits.filter((t) => t.trait === "loss_db_cm");

Deno.test("a guide with two lengths has a line of its own, per wavelength and polarisation", () => {
  const reduced = reduce([
    reading("A-1/01/g1", 20, 3.0),
    reading("A-1/01/g1", 10, 2.6),
    reading("A-1/01/g1", 20, 4.0, { polarisation: "TM" }),
    reading("A-1/01/g1", 10, 3.2, { polarisation: "TM" }),
    reading("A-1/01/g2", 20, 3.1),
    reading("A-1/01/g2", 10, 3.0),
  ]);
  const found = losses(reduced).map((t) => [t.unit, t.polarisation, Number(t.value.toFixed(9)), t.u_from]);
  deepEqual(found, [
    ["A-1/01/g1", "TE", 0.4, "stated"],
    ["A-1/01/g1", "TM", 0.8, "stated"],
    ["A-1/01/g2", "TE", 0.1, "stated"],
  ]);
  // Two readings of 0.01 dB a centimetre apart: u = 0.01·√2 dB/cm.
  assertClose(losses(reduced)[0]!.u, 0.01 * Math.SQRT2, { rel: 1e-9 });
  // Equal weights at 1 cm and 2 cm: −mean(x)/√mean(x²) = −1.5/√2.5.
  match(
    reduced.traits.find((t) => t.trait === "coupling_db")!.detail!,
    /correlation with the slope -0\.949/,
  );
  const coupling = reduced.traits.filter((t) => t.trait === "coupling_db").map((t) =>
    Number(t.value.toFixed(9))
  );
  deepEqual(coupling, [2.2, 2.4, 2.9]);
  deepEqual(losses(reduced)[2]!.readings, [{
    table: "cutback",
    file_name: "readings/cutback.csv",
    source_file: "00",
    lines: [[6, 7]],
  }]);
  deepEqual(reduced.remarks, []);
});

Deno.test("guides with one length each share the slope of their die; other dies' readings are no part of it", () => {
  const reduced = reduce([
    reading("A-1/01/g1", 20, 3.0),
    reading("A-1/01/g2", 10, 2.5),
    reading("A-1/01/g3", 5, 2.25),
    reading("A-1/02/g1", 5, 9),
  ]);
  const [slope, ...rest] = losses(reduced);
  deepEqual(rest, []);
  deepEqual([slope!.scope, slope!.unit, slope!.guide_id, slope!.width_um], ["die", "A-1/01", null, null]);
  assertClose(slope!.value, 0.5, { rel: 1e-9 });
  match(slope!.method, /common slope/);
  // Three lines of the file, not of die 02.
  equal(slope!.readings[0]!.lines.reduce((n, [a, b]) => n + b - a + 1, 0), 3);
  deepEqual(reduced.remarks.map((r) => [r.code, r.unit]), [["cutback_refused", "A-1/02"]]);
  match(reduced.remarks[0]!.statement, /A-1\/02\/g1 at 1550 nm TE.*need two lengths/);
});

Deno.test("a stated u goes before the platform's; scatter beyond it widens u and is remarked", () => {
  const lone = [
    reading("A-1/01/g1", 20, 3, { u_insertion_loss_db: null }),
    reading("A-1/01/g1", 10, 2.5, { u_insertion_loss_db: null }),
  ];
  const [byPlatform] = losses(reduce(lone, 0.1));
  equal(byPlatform!.u_from, "platform");
  assertClose(byPlatform!.u, 0.1 * Math.SQRT2, { rel: 1e-9 });
  const points = [[20, 3.0], [16, 2.9], [12, 2.45], [8, 2.5], [4, 2.1]] as const;
  const calm = reduce(points.map(([l, db]) => reading("A-1/01/g1", l, db, { u_insertion_loss_db: 0.15 })));
  const wild = reduce(points.map(([l, db]) => reading("A-1/01/g1", l, db, { u_insertion_loss_db: 0.02 })));
  deepEqual(calm.remarks, []);
  assertClose(losses(wild)[0]!.value, losses(calm)[0]!.value, { rel: 1e-9 });
  ok(wild.remarks.some((r) => r.code === "cutback_scatter"));
  // Widened to the scatter itself: the standard error of a least-squares slope, σ/√Σ(x − x̄)².
  const [n, x, y] = [points.length, points.map(([l]) => l / 10), points.map(([, db]) => db)];
  const mean = (v: number[]) => v.reduce((a, b) => a + b) / n;
  const sxx = x.reduce((sum, a) => sum + (a - mean(x)) ** 2, 0);
  const slope = x.reduce((sum, a, k) => sum + (a - mean(x)) * y[k]!, 0) / sxx;
  const rest = y.map((b, k) => b - mean(y) - slope * (x[k]! - mean(x)));
  const sigma = Math.sqrt(rest.reduce((sum, r) => sum + r * r, 0) / (n - 2));
  assertClose(losses(wild)[0]!.value, slope, { rel: 1e-9 });
  assertClose(losses(wild)[0]!.u, sigma / Math.sqrt(sxx), { rel: 1e-6 });
});

Deno.test("a gain, as errors near no loss will give, is kept as it is", () => {
  const [trait] = losses(reduce([reading("A-1/01/g1", 20, 2.48), reading("A-1/01/g1", 10, 2.5)]));
  assertClose(trait!.value, -0.02, { rel: 1e-9 });
});

Deno.test("a reading 3.6 u off is named in a lot of one line, and not among the lines of two dozen guides", () => {
  const lengths = [5, 10, 15, 20, 25, 30];
  const lineOf = (unit: string, off: number, nm = 1550) =>
    lengths.map((l, k) => reading(unit, l, 2 + 0.04 * l + (k === 2 ? off : 0), { wavelength_nm: nm }));
  const named = (rows: CutbackRecord[]) =>
    reduce(rows).remarks.filter((r) => r.code === "cutback_outlier").length;
  const odd = lineOf("A-1/01/g1", 0.036);
  equal(named(odd), 1);
  const good = Array.from({ length: 24 }, (_, k) => lineOf("A-1/01/g2", 0, 1500 + k)).flat();
  equal(named([...odd, ...good]), 0);
  equal(named([...lineOf("A-1/01/g1", 0.08), ...good]), 1);
});
