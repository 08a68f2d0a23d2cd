import { deepEqual, equal, ok, throws } from "node:assert/strict";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import { InputError } from "../../../shared/errors.ts";
import { assertClose } from "../../assert_close.ts";
import {
  coatings,
  guideRecord,
  HERE,
  lotDesign,
  PLATFORM,
  SAME_DIE,
  SAME_LOT,
  SAME_WAFER,
  traitRow,
} from "./a_lot.ts";

const loss = (unit: string, value: number, nm = 1582, polarisation: "TE" | "TM" = "TE") =>
  traitRow("loss_db_cm", unit, value, { wavelength_nm: nm, polarisation });
const pools = (rows: readonly TraitRow[], design = lotDesign()) => new TraitPools(PLATFORM, design, rows);
const lossAt = (p: TraitPools, guide = HERE, nm = 1582, pol: "TE" | "TM" = "TE") =>
  p.need("loss_db_cm", guide, nm, pol);

Deno.test("a guide takes its own reading, else its die's, wafer's, lot's, else the platform's; u grows with each level", () => {
  const p = pools([loss("A-1/01/g1", 0.3)]);
  const found = [HERE, SAME_DIE, SAME_WAFER, SAME_LOT].map((g) => lossAt(p, g));
  deepEqual(found.map((f) => f.basis), ["measured", "die", "wafer", "lot"]);
  deepEqual(found.map((f) => f.from), ["A-1/01/g1", "A-1/01", "A-1", "A"]);
  for (const f of found) {
    deepEqual(f.used, [0]);
    // One reading against a default of 0.5 ± 0.2: the farther from it, the more of the default is in the value.
    ok(f.value > 0.3 && f.value < 0.36, `${f.value}`);
    assertClose(Object.values(f.shares!).reduce((sum, x) => sum + x, 0), 1, { rel: 1e-9 });
  }
  for (let k = 1; k < 4; k++) {
    ok(found[k]!.u > found[k - 1]!.u && found[k]!.value > found[k - 1]!.value, `${found[k]!.u}`);
  }
  ok(found[0]!.u <= 0.001 && found[0]!.shares!.own > 0.99, "its own reading is nearly all that counts");
  deepEqual(found.slice(1).map((f) => f.shares!.own), [0, 0, 0]);
  ok(found[1]!.shares!.die > 0.9 && found[2]!.shares!.die === 0 && found[2]!.shares!.wafer > 0.9);
  const platform = lossAt(p, HERE, 1582, "TM");
  deepEqual([platform.value, platform.u, platform.basis, platform.used], [0.9, 0.3, "platform", []]);
});

Deno.test("the nearest reading within ±5 % counts, repeats alike; never one of the other polarisation", () => {
  const p = pools([
    loss("A-1/01/g1", 0.3, 1550),
    loss("A-1/01/g1", 0.4, 1600),
    loss("A-1/01/g1", 0.42, 1600),
    loss("A-1/01/g1", 9, 1582, "TM"),
  ]);
  const far = lossAt(p);
  assertClose(far.value, 0.41, { rel: 1e-5 });
  deepEqual(far.used, [1, 2]);
  assertClose(far.distance!, 1600 / 1582 - 1, { rel: 1e-9 });
  assertClose(lossAt(p, HERE, 1560).value, 0.3, { rel: 1e-4 });
  // ±5 % of where it is used: 1476.2 nm is the last wavelength that 1550 nm serves.
  equal(lossAt(p, HERE, 1476.3).basis, "measured");
  equal(lossAt(p, HERE, 1476.1).basis, "platform");
  equal(lossAt(p, HERE, 1700).basis, "platform");
  equal(lossAt(p, HERE, 791, "TM").basis, "platform");
});

Deno.test("a mode's size and its u are carried with the wavelength, readings and default alike; a loss is not", () => {
  const p = pools([
    traitRow("mfd_x_um", "A-1/01/g1", 7.75, { wavelength_nm: 1550, polarisation: "TE", u: 0.01 }),
  ]);
  const own = p.estimate("mfd_x_um", HERE, 1600, "TE")!;
  assertClose(own.value, 8, { rel: 1e-4 });
  assertClose(own.u, 0.01 * 1600 / 1550, { rel: 0.01 });
  // The carried default and its carried spreads lead to the carried estimate: wavelength is a scale and nothing else.
  const atReading = p.estimate("mfd_x_um", HERE, 1550, "TE")!;
  assertClose(own.value / atReading.value, 1600 / 1550, { rel: 1e-9 });
  assertClose(own.u / atReading.u, 1600 / 1550, { rel: 1e-9 });
  assertClose(own.distance!, 1550 / 1600 - 1, { rel: 1e-12 });
  const fallback = p.estimate("mfd_x_um", HERE, 775, "TM")!;
  deepEqual([fallback.value, fallback.u, fallback.basis], [4, 0.5, "platform"]);
  assertClose(lossAt(pools([loss("A-1/01/g1", 0.3, 1550)]), HERE, 1600).value, 0.3, { rel: 1e-4 });
});

Deno.test("readings at two wavelengths err apart, one reading that serves two wavelengths errs alike", () => {
  const p = pools([loss("A-1/01/g1", 0.7, 791), loss("A-1/01/g1", 0.3, 1582)]);
  const keys = (guide: typeof HERE, ...at: number[]) =>
    new Set(at.map((nm) => lossAt(p, guide, nm).key)).size;
  for (const guide of [HERE, SAME_DIE, SAME_WAFER, SAME_LOT]) {
    equal(keys(guide, 791, 1582), 2);
    equal(keys(guide, 1570, 1582, 1600), 1);
  }
});

Deno.test("guides of the same design width are heard first", () => {
  const wide = { ...loss("A-1/01/g2", 0.9), width_um: 6 };
  const alone = lossAt(pools([wide]));
  assertClose(alone.value, 0.9, { abs: 0.03 });
  equal(alone.otherWidth, true);
  const p = pools([wide, loss("A-1/02/g1", 0.3)]);
  const found = lossAt(p);
  // The other width of the own die, or the own width of the next: the die comes first, and says so.
  deepEqual([found.basis, found.otherWidth], ["die", true]);
  equal(lossAt(p, SAME_LOT).otherWidth, false);
  assertClose(lossAt(p, SAME_LOT).value, 0.3, { abs: 0.03 });
});

const mirror = (nm: number, value: number, unit = "C1|out") =>
  traitRow("reflectivity", unit, value, { wavelength_nm: nm, u: 0.0001 });
const coated = (...runs: string[]) =>
  lotDesign({ coatingOf: coatings(...runs.map((run) => ["A-1/01", "out", run] as const)) });

Deno.test("a coated facet: linear between readings up to 25 nm apart, 5 nm beyond, else the coated default, never bare", () => {
  const facet = (readings: TraitRow[], nm: number) =>
    pools(readings, coated("C1")).outputFacet(HERE, nm, "TE").resolved!;
  const between = facet([mirror(1570, 0.012), mirror(1595, 0.002)], 1582);
  assertClose(between.value, 0.012 - 12 / 25 * 0.01, { rel: 1e-9 });
  deepEqual([between.basis, between.from, between.used], ["die", "C1", [0, 1]]);
  for (
    const [readings, nm, basis] of [
      [[mirror(1570, 0.012), mirror(1595.1, 0.002)], 1582, "platform"],
      [[mirror(1570, 0.012)], 1575, "die"],
      [[mirror(1570, 0.012)], 1575.1, "platform"],
      [[mirror(1570, 0.012)], 1564.9, "platform"],
      [[], 1570, "platform"],
      [[mirror(1570, 0.012, "C1|in")], 1570, "platform"],
      [[mirror(1570, 0.012, "C2|out")], 1570, "platform"],
    ] as const
  ) {
    const found = facet([...readings], nm);
    equal(found.basis, basis, `${nm}`);
    if (basis === "platform") deepEqual([found.value, found.u], [0.01, 0.01]);
  }
});

Deno.test("a coating that nobody measured errs alike in both polarisations, unless the platform tells them apart", () => {
  const keys = (coated_reflectivity: object) => {
    const platform = {
      ...PLATFORM,
      defaults: { ...PLATFORM.defaults, coated_reflectivity },
    } as typeof PLATFORM;
    const p = new TraitPools(platform, coated("C1"), []);
    return new Set((["TE", "TM"] as const).map((pol) => p.outputFacet(HERE, 1582, pol).resolved!.key)).size;
  };
  equal(keys({ value: 0.01, u: 0.01 }), 1);
  equal(keys({ TE: { value: 0.01, u: 0.01 }, TM: { value: 0.02, u: 0.01 } }), 2);
});

Deno.test("the last coating of a facet counts; the input facet's coating is not the output's; no coating is bare", () => {
  const readings = [mirror(1582, 0.5, "C1|out"), mirror(1582, 0.003, "C2|out")];
  equal(pools(readings, coated("C1", "C2")).outputFacet(HERE, 1582, "TE").resolved!.value, 0.003);
  equal(pools(readings, coated("C2", "C1")).outputFacet(HERE, 1582, "TE").resolved!.value, 0.5);
  const inOnly = lotDesign({ coatingOf: coatings(["A-1/01", "in", "C1"]) });
  for (const design of [inOnly, lotDesign()]) {
    const { facet, resolved } = pools(readings, design).outputFacet(HERE, 1582, "TE");
    deepEqual([facet, resolved], [{ state: "bare", basis: "die" }, null]);
  }
  deepEqual(pools(readings, coated("C1")).outputFacet(SAME_WAFER, 1582, "TE").resolved, null, "another die");
});

Deno.test("what neither readings nor the platform know is an error that names the default to give", () => {
  const { loss_db_cm: _, coated_reflectivity: __, ...defaults } = PLATFORM.defaults;
  const p = new TraitPools({ ...PLATFORM, defaults }, coated("C1"), []);
  throws(
    () => lossAt(p),
    (e) => e instanceof InputError && /loss_db_cm \(TE\).*A-1\/01\/g1.*"defaults"/.test(e.message),
  );
  throws(
    () => p.outputFacet(HERE, 1582, "TE"),
    (e) => e instanceof InputError && /coated_reflectivity.*C1/.test(e.message),
  );
  equal(p.estimate("merged", HERE, null, null), null);
});

Deno.test("a scan's offset serves the guide's own process within ±5 % of its wavelength, and no other guide without a default", () => {
  const scan = traitRow("mismatch_offset_per_m", "A-1/01/g1", 25, {
    wavelength_nm: 1582,
    process: "TE>TE+TM",
    u: 2,
  });
  const p = pools([scan]);
  const found = p.offset(HERE, "TE>TE+TM", 1600)!;
  deepEqual([found.value, found.u, found.basis], [25, 2, "measured"]);
  equal(p.offset(HERE, "TE>TE+TM", 1700), null);
  equal(p.offset(HERE, "TM>TM+TM", 1582), null);
  equal(p.offset(SAME_DIE, "TE>TE+TM", 1582), null);
});

Deno.test("other lots of the platform narrow what is expected of a lot; their readings are never named as its own", () => {
  const seven = Array.from({ length: 7 }, (_, k) => otherLot(`B${k}`, 0.7 + 0.002 * k));
  const alone = lossAt(pools([]));
  const p = new TraitPools(PLATFORM, lotDesign(), [], seven);
  const among = lossAt(p);
  deepEqual([alone.value, alone.u, alone.basis], [0.5, 0.2, "platform"]);
  // A lot that nobody read keeps the platform's own doubt.
  deepEqual([among.basis, among.used, among.from], ["platform", [], "p"]);
  assertClose(among.value, 0.706, { abs: 0.02 });
  ok(among.u >= 0.2 && among.shares!.lots > 0.8, `${among.u} ${among.shares!.lots}`);
  const read = lossAt(new TraitPools(PLATFORM, lotDesign(), [loss("A-1/01/g1", 0.72)], seven), SAME_LOT);
  deepEqual([read.basis, read.used], ["lot", [0]]);
  ok(read.value > 0.7 && read.value < 0.72 && read.u < 0.06, `${read.value} ± ${read.u}`);
});

Deno.test("seeds do not depend on other lots, and cross-sections are pooled within their lot", () => {
  const rows = [loss("A-1/01/g1", 0.3), traitRow("width_error_um", "A-1/01/g1", 0.05)];
  const other = [otherLot("B", 0.9)];
  const [alone, among] = [pools(rows), new TraitPools(PLATFORM, lotDesign(), rows, other)];
  equal(lossAt(alone, SAME_LOT).key, lossAt(among, SAME_LOT).key);
  ok(lossAt(alone, SAME_LOT).value !== lossAt(among, SAME_LOT).value);
  for (const guide of [HERE, SAME_DIE, SAME_LOT]) {
    deepEqual(
      alone.estimate("width_error_um", guide, null, null),
      among.estimate("width_error_um", guide, null, null),
    );
  }
});

Deno.test("a reading that its neighbours contradict is named with its position, and stays in use", () => {
  const dies = Array.from({ length: 8 }, (_, k) => `A-1/${String(k + 1).padStart(2, "0")}`);
  const rows = dies.flatMap((die) => [
    loss(`${die}/g1`, 0.3 + 0.004 * Math.sin(7 * dies.indexOf(die))),
    loss(`${die}/g2`, die === "A-1/05" ? 0.9 : 0.305),
  ]);
  const guides = rows.map((r) => guideRecord(r.unit));
  const p = new TraitPools(PLATFORM, lotDesign({}, guides), rows);
  const [named, ...more] = p.contradictions("loss_db_cm", 1582, "TE");
  equal(more.length, 0);
  deepEqual([named!.unit, named!.used, named!.trait], ["A-1/05/g2", [9], "loss_db_cm"]);
  assertClose(named!.expected, 0.3, { abs: 0.02 });
  ok(lossAt(p, guides[9]!).value > 0.8);
  deepEqual(p.contradictions("merged", null, null), []);
});

Deno.test("a scan's offset is its guide's own as read; for its neighbours its u grows by what the cross-section errs", () => {
  const defaults = { ...PLATFORM.defaults, mismatch_offset_per_m: { value: 0, u: 500 } };
  const scan = (u_pooled: number | null) =>
    traitRow("mismatch_offset_per_m", "A-1/01/g1", 80, {
      wavelength_nm: 1582,
      process: "TE>TE+TM",
      u: 2,
      u_pooled,
    });
  const of = (u_pooled: number | null, guide: typeof HERE) =>
    new TraitPools({ ...PLATFORM, defaults }, lotDesign(), [scan(u_pooled)]).offset(guide, "TE>TE+TM", 1582)!;
  deepEqual([of(null, HERE).value, of(null, HERE).u], [80, 2]);
  deepEqual([of(300, HERE).value, of(300, HERE).u], [80, 2]);
  ok(of(300, SAME_DIE).u > of(null, SAME_DIE).u);
  ok(Math.abs(of(300, SAME_DIE).value) < Math.abs(of(null, SAME_DIE).value));
});

Deno.test("the usual offset of a lot is what its scans have in common, and unknown where nobody scanned or none is expected", () => {
  const defaults = { ...PLATFORM.defaults, mismatch_offset_per_m: { value: 0, u: 5000 } };
  const priors = { mismatch_offset_per_m: { lot_sd: 5000, wafer_sd: 60, die_sd: 30, guide_sd: 30 } };
  const scans = [HERE, SAME_DIE, SAME_WAFER, SAME_LOT].map((g, k) =>
    traitRow("mismatch_offset_per_m", g.guide_id, -400 + 20 * k, {
      wavelength_nm: 1582,
      process: "TE>TE+TM",
      u: 2,
    })
  );
  const usual = (rows: readonly TraitRow[], platform = { ...PLATFORM, defaults, priors }) =>
    new TraitPools(platform, lotDesign(), rows).usualOffset("TE>TE+TM", 1582);
  assertClose(usual(scans)!, -370, { abs: 25 });
  equal(usual([]), null);
  equal(usual(scans, PLATFORM as never), null);
});

/** A lot of one wafer, two guides read. */
function otherLot(lot: string, value: number) {
  const rows = [loss(`${lot}-1/01/g1`, value), loss(`${lot}-1/02/g1`, value + 0.01)];
  return { lot, rows, places: new Map(rows.map((r) => [r.die_id!, { x: 1, y: 2 }])) };
}
