import { deepEqual, equal, ok, throws } from "node:assert/strict";
import { TraitPools } from "../../../pipeline/traits/pools.ts";
import type { TraitRow } from "../../../pipeline/traits/trait_row.ts";
import { InputError } from "../../../shared/errors.ts";
import { assertClose } from "../../assert_close.ts";
import { coatings, HERE, lotDesign, PLATFORM, SAME_DIE, SAME_LOT, SAME_WAFER, traitRow } from "./a_lot.ts";

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
    assertClose(f.value, 0.3, { rel: 1e-9 });
    deepEqual(f.used, [0]);
  }
  for (let k = 1; k < 4; k++) ok(found[k]!.u > found[k - 1]!.u, `${found[k]!.u}`);
  // Variances add: the reading's own, as its die's mean scatters about it, and every spread that is crossed.
  assertClose(found[1]!.u ** 2, 0.001 ** 2 + 2 * 0.01 ** 2, { rel: 1e-9 });
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
  assertClose(far.value, 0.41, { rel: 1e-9 });
  deepEqual(far.used, [1, 2]);
  assertClose(far.distance!, 1600 / 1582 - 1, { rel: 1e-9 });
  assertClose(lossAt(p, HERE, 1560).value, 0.3, { rel: 1e-9 });
  // ±5 % of where it is used: 1476.2 nm is the last wavelength that 1550 nm serves.
  equal(lossAt(p, HERE, 1476.3).basis, "measured");
  equal(lossAt(p, HERE, 1476.1).basis, "platform");
  equal(lossAt(p, HERE, 1700).basis, "platform");
  equal(lossAt(p, HERE, 791, "TM").basis, "platform");
});

Deno.test("a mode's size and its u are carried with the wavelength, readings and default alike; a loss is not", () => {
  const p = pools([
    traitRow("mfd_x_um", "A-1/01/g1", 7.75, { wavelength_nm: 1550, polarisation: "TE", u: 0.1 }),
  ]);
  const own = p.estimate("mfd_x_um", HERE, 1600, "TE")!;
  assertClose(own.value, 8, { rel: 1e-12 });
  assertClose(own.u, 0.1 * 1600 / 1550, { rel: 1e-12 });
  assertClose(own.distance!, 1550 / 1600 - 1, { rel: 1e-12 });
  const fallback = p.estimate("mfd_x_um", HERE, 775, "TM")!;
  deepEqual([fallback.value, fallback.u, fallback.basis], [4, 0.5, "platform"]);
  assertClose(lossAt(pools([loss("A-1/01/g1", 0.3, 1550)]), HERE, 1600).value, 0.3, { rel: 1e-12 });
});

Deno.test("guides of the same design width are heard first", () => {
  const wide = { ...loss("A-1/01/g2", 0.9), width_um: 6 };
  const alone = lossAt(pools([wide]));
  deepEqual([alone.value, alone.otherWidth], [0.9, true]);
  const p = pools([wide, loss("A-1/02/g1", 0.3)]);
  const found = lossAt(p);
  // The other width of the own die, or the own width of the next: the die comes first, and says so.
  deepEqual([found.basis, found.otherWidth], ["die", true]);
  equal(lossAt(p, SAME_LOT).otherWidth, false);
  assertClose(lossAt(p, SAME_LOT).value, 0.3, { rel: 1e-9 });
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
