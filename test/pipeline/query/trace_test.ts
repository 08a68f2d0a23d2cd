import assert from "node:assert/strict";
import { join } from "node:path";
import { InputError, LedgerError } from "../../../shared/errors.ts";
import { FIGURES } from "../../../shared/schemas/figures.ts";
import { weakestBasis } from "../../../shared/vocabulary.ts";
import { sha256 } from "../../../pipeline/json_file.ts";
import { type Ledger, openLedger } from "../../../pipeline/ledger/mod.ts";
import { rankGuides } from "../../../pipeline/query/rank.ts";
import { traceFigure } from "../../../pipeline/query/trace.ts";
import { nearestFullId } from "../../../pipeline/query/trace_find.ts";
import { followRoles, type StoredRole } from "../../../pipeline/query/trace_roles.ts";
import type { Trace, TracedTrait } from "../../../pipeline/query/trace_types.ts";
import { loadRequestFile } from "../../../pipeline/requests.ts";
import type { RoleTrait } from "../../../pipeline/traits/guide_traits.ts";
import { assertClose } from "../../assert_close.ts";
import { CUTBACK, WALLS, withTracedLot } from "./traced_lot.ts";

const trace = (ledger: Ledger, id: string, figure: string, request = "pairs"): Promise<Trace> =>
  traceFigure(ledger, id, { figure, request });

const ofRole = ({ traits }: Trace, role: string): TracedTrait => traits.find((t) => t.role === role)!;
/** Line, value and u of the readings under a trait. */
const readingsOf = ({ measured, readings }: TracedTrait) =>
  [...measured.flatMap((row) => row.readings), ...readings].map((r) => [r.source_line, r.value, r.u]);

Deno.test("a measured loss leads to the lines, values and stated u of its own cut-back", () =>
  withTracedLot(async ({ ledger }) => {
    const found = await trace(ledger, "K07-1/05/g01", "loss_db_cm_signal");
    assert.deepEqual(found.traits.map((t) => [t.role, t.trait, t.basis, t.from]), [
      ["signal_loss", "loss_db_cm", "measured", "K07-1/05/g01"],
    ]);
    const [loss] = found.traits;
    assert.deepEqual(readingsOf(loss!), [[2, 2.9, 0.01], [3, 2.81, 0.01], [4, 2.7, null]]);
    assert.equal(loss!.measured[0]!.u_from, "platform"); // one of the three states no u
    const [reading] = loss!.measured[0]!.readings;
    assert.equal(reading!.file_name, "readings/cutback.csv");
    assert.equal(reading!.source_file, sha256(CUTBACK));
    assert.equal(reading!.quantity, "insertion_loss_db");
    assert.deepEqual(reading!.row, { wavelength_nm: 1582, polarisation: "TE", length_mm: 8 });
    assert.deepEqual(found.remarks, []);
  }));

Deno.test("a pooled loss leads to every unit that it was pooled from", () =>
  withTracedLot(async ({ ledger }) => {
    const loss = ofRole(await trace(ledger, "K07-1/07/g01", "heralding_signal"), "signal_loss");
    assert.equal(loss.basis, "wafer");
    assert.equal(loss.from, "K07-1");
    assert.deepEqual(loss.measured.map((row) => row.unit), ["K07-1/05/g01", "K07-1/05/g02"]);
    assert.deepEqual(readingsOf(loss).map(([line]) => line), [2, 3, 4, 5, 6]);
    assertClose(loss.measured[1]!.value, (2.95 - 2.75) / 0.4, { rel: 1e-9 });
  }));

Deno.test("a loss from fringes between coated facets leads to the witness readings of the coating, too", () =>
  withTracedLot(async ({ ledger }) => {
    const [loss] = (await trace(ledger, "K07-1/06/g02", "loss_db_cm_idler")).traits;
    assert.equal(loss!.basis, "measured");
    assert.deepEqual(
      loss!.measured[0]!.readings.map((r) => [r.file_name, r.source_line, r.quantity, r.value]),
      [
        ["readings/fringes.csv", 2, "contrast", 0.03],
        ["readings/facets.csv", 3, "reflectivity", 0.006],
        ["readings/facets.csv", 4, "reflectivity", 0.004],
      ],
    );
  }));

Deno.test("each axis of a mode shows its own column, and the wavelength that it was carried over", () =>
  withTracedLot(async ({ ledger }) => {
    const found = await trace(ledger, "K07-1/05/g01", "coupling_signal");
    assert.deepEqual(found.traits.map((t) => [t.trait, readingsOf(t)]), [
      ["mfd_x_um", [[2, 8.1, null]]],
      ["mfd_y_um", [[2, 6.2, null]]],
    ]);
    // One reading with u 0.1 µm or so and a wide default: the estimate is the carried reading, but for what the default pulls.
    assertClose(found.traits[0]!.value!, 8.1 * 1582 / 1550, { rel: 2e-3 });
    assert.ok(found.traits[0]!.shares!.own > 0.9);
    assertClose(found.traits[0]!.distance!, (1550 - 1582) / 1582, { rel: 1e-12 });
  }));

Deno.test("walls and scans are one entry per stretch of lines, with count, first and last value", () =>
  withTracedLot(async ({ ledger }) => {
    const walls = ofRole(await trace(ledger, "K07-1/06/g01", "purity"), "poling");
    assert.equal(walls.trait, "walls");
    const [stretch, ...others] = walls.measured[0]!.readings;
    assert.deepEqual(others, []);
    assert.equal(stretch!.rows, WALLS.length);
    assert.deepEqual([stretch!.source_line, stretch!.source_line_last], [2, WALLS.length + 1]);
    assert.deepEqual([stretch!.value, stretch!.value_last], [WALLS[0], WALLS.at(-1)]);
    const scan = ofRole(
      await trace(ledger, "K07-1/06/g02", "operating_temperature_c", "double"),
      "phase_matching",
    );
    assert.equal(scan.basis, "measured");
    assert.deepEqual(scan.measured[0]!.readings.map((r) => [r.source_line, r.source_line_last, r.rows]), [
      [2, 62, 61],
    ]);
  }));

Deno.test("poling windows that were used as they are stand under the trait itself", () =>
  withTracedLot(async ({ ledger }) => {
    const windows = ofRole(await trace(ledger, "K07-1/05/g01", "purity"), "poling");
    assert.equal(windows.trait, "poling windows");
    assert.deepEqual(windows.readings.map((r) => [r.quantity, r.value, r.row.domains]), [[
      "duty_mean",
      0.47,
      21,
    ]]);
  }));

Deno.test("coatings show every entry and which one counts; the facet rests on that one's spectrum", () =>
  withTracedLot(async ({ ledger }) => {
    const found = await trace(ledger, "K07-1/05/g01", "facet_signal");
    assert.deepEqual(found.coatings.map((c) => [c.facet, c.coating_run, c.counts]), [
      ["out", "C1", false],
      ["out", "C2", true],
    ]);
    assert.equal(found.traits[0]!.from, "C2");
    assert.deepEqual(readingsOf(found.traits[0]!), [[2, 0.004, null]]);
    const unknown = await trace(ledger, "K07-1/06/g01", "facet_signal");
    assert.deepEqual(unknown.platform.defaults.map((d) => [d.default, d.value, d.roles]), [
      ["coated_reflectivity", unknown.traits[0]!.value, ["signal_facet"]],
    ]);
    const bare = await trace(ledger, "K07-1/07/g01", "facet_signal");
    assert.deepEqual(bare.coatings, []);
    assert.match(bare.traits[0]!.note!, /bare/);
  }));

Deno.test("steps come in their order with tool, recipe, settings and time, the design with its line", () =>
  withTracedLot(async ({ ledger }) => {
    const { steps, design, wafer } = await trace(ledger, "K07-1/05/g02", "purity");
    assert.deepEqual(steps.map((s) => [s.order, s.step, s.tool, s.recipe, s.finished, s.settings]), [
      [1, "cleaning", null, "R2", "2026-02-03T10:00:00Z", {}],
      [2, "poling", "bench-1", null, null, { voltage_v: 900 }],
    ]);
    assert.equal(design.source_line, 3);
    assert.equal(design.period_um, 46.05);
    assert.equal(wafer.substrate_batch, "S-4");
  }));

Deno.test("the basis of every figure is the weakest of the traits that its trace shows", () =>
  withTracedLot(async ({ ledger }) => {
    let traced = 0;
    for (const guide of ["K07-1/05/g01", "K07-1/06/g01", "K07-1/06/g02", "K07-1/07/g01"]) {
      for (const figure of FIGURES.filter((f) => f !== "pair_rate_hz" && f !== "peak_conversion")) {
        const found = await trace(ledger, guide, figure);
        assert.equal(weakestBasis(found.traits.map((t) => t.basis)), found.basis, `${figure} of ${guide}`);
        traced++;
      }
    }
    assert.equal(traced, 4 * (FIGURES.length - 2));
  }));

Deno.test("a figure that does not exist for a guide has its reason, and still what it rests on", () =>
  withTracedLot(async ({ ledger }) => {
    const found = await trace(ledger, "K07-1/07/g03", "purity");
    assert.equal(found.mean, null);
    assert.ok(found.reason !== undefined && found.reason.length > 10, found.reason);
    assert.deepEqual([...new Set(found.traits.map((t) => t.role))], ["pump_loss", "poling"]);
  }));

Deno.test("a die is traced by the guide that a ranking shows", () =>
  withTracedLot(async ({ ledger, requests }) => {
    const request = await loadRequestFile(join(requests, "pairs.json"));
    const { dies } = await rankGuides(ledger, request, { lots: ["K07"], allGuides: false, top: null });
    for (const { die, guide, figures } of dies) {
      const found = await trace(ledger, die, "heralding_signal");
      assert.equal(found.guide, guide);
      assert.equal(found.mean, figures.heralding_signal.mean);
      assert.equal(found.probability, figures.heralding_signal.probability);
    }
    assert.equal(dies.length, 3);
  }));

Deno.test("what was taken in after the prediction does not show, and the trace says that it is out of date", () =>
  withTracedLot(async ({ ledger, scene }) => {
    const before = await trace(ledger, "K07-1/05/g01", "loss_db_cm_signal");
    await scene.write({ "readings/cutback.csv": CUTBACK.replace(",2.81,", ",2.85,") });
    await scene.ingest();
    await using later = await openLedger(ledger.directory, { write: false });
    const after = await trace(later, "K07-1/05/g01", "loss_db_cm_signal");
    assert.deepEqual(after.traits, before.traits);
    assert.equal(after.remarks.length, 1);
    assert.match(after.remarks[0]!, /out of date: readings\/cutback\.csv taken in since/);
  }));

Deno.test("another platform file is said; values stay the stored ones and readings can still be told", async () => {
  const folder = await Deno.makeTempDir({ prefix: "wavelot-test-" });
  const builtIn = new URL("../../../models/platforms/bulk-ktp.json", import.meta.url);
  const file = join(folder, "bulk-ktp.json");
  try {
    const platform = JSON.parse(await Deno.readTextFile(builtIn));
    await Deno.writeTextFile(file, JSON.stringify(platform));
    await withTracedLot(async ({ ledger }) => {
      const ask = () =>
        traceFigure(ledger, "K07-1/07/g01", {
          figure: "heralding_signal",
          request: "pairs",
          platforms: folder,
        });
      const before = await ask();
      assert.deepEqual(before.remarks, []);
      platform.defaults.loss_db_cm = { value: 3, u: 1 };
      await Deno.writeTextFile(file, JSON.stringify(platform));
      const after = await ask();
      assert.deepEqual(after.traits, before.traits);
      assert.match(after.remarks.join("\n"), /platform bulk-ktp is not the one/);
      delete platform.defaults.loss_db_cm;
      await Deno.writeTextFile(file, JSON.stringify(platform));
      const without = await ask();
      assert.equal(ofRole(without, "signal_loss").value, ofRole(before, "signal_loss").value);
    }, { platforms: folder });
  } finally {
    await Deno.remove(folder, { recursive: true });
  }
});

Deno.test("the sha256 of request and platform are those of their files", () =>
  withTracedLot(async ({ ledger, requests }) => {
    const found = await trace(ledger, "K07-1/05/g01", "purity");
    const builtIn = new URL("../../../models/platforms/bulk-ktp.json", import.meta.url);
    assert.equal(found.request_sha256, sha256(await Deno.readFile(join(requests, "pairs.json"))));
    assert.equal(found.platform.sha256, sha256(await Deno.readFile(builtIn)));
  }));

Deno.test("a request whose file has changed since is said", () =>
  withTracedLot(async ({ ledger, requests }) => {
    const { fingerprint } = await loadRequestFile(join(requests, "pairs.json"));
    const ask = (requestFingerprint: string) =>
      traceFigure(ledger, "K07-1/05/g01", { figure: "purity", request: "pairs", requestFingerprint });
    assert.deepEqual((await ask(fingerprint)).remarks, []);
    assert.match((await ask("0".repeat(64))).remarks.join(), /file of request pairs has changed/);
  }));

Deno.test("unknown ids, figures and requests are the call's mistake, with the nearest or the list", () =>
  withTracedLot(async ({ ledger }) => {
    const cases: [string, string, string | null, RegExp][] = [
      ["K07-1/5/g1", "purity", "pairs", /Unknown die or guide .*did you mean "K07-1\/05\/g01"/],
      ["06/g02", "purity", "pairs", /did you mean "K07-1\/06\/g02"/],
      ["K07-1", "purity", "pairs", /it is a wafer/],
      ["K07-1/05/g01", "purty", "pairs", /Unknown figure "purty" \(did you mean "purity"\?\)/],
      ["K07-1/05/g01", "purity", "double", /not a figure of second-harmonic/],
      ["K07-1/05/g01", "pair_rate_hz", "pairs", /continuous-wave/],
      ["K07-1/05/g01", "purity", "pair", /no prediction .*did you mean "pairs"\?.*double, pairs/],
      ["K07-1/05/g01", "purity", null, /2 requests; name one with --request: double, pairs/],
    ];
    for (const [id, figure, request, message] of cases) {
      await assert.rejects(traceFigure(ledger, id, { figure, request }), (error: Error) => {
        assert.ok(error instanceof InputError, error.stack);
        assert.match(error.message, message);
        return true;
      });
    }
  }));

Deno.test("one predicted request need not be named; without a prediction the call says what to run", async () => {
  await withTracedLot(async ({ ledger }) => {
    const found = await traceFigure(ledger, "K07-1/05/g01", { figure: "acceptance_nm", request: null });
    assert.equal(found.request, "double");
  }, { requests: ["double"] });
  await withTracedLot(async ({ ledger }) => {
    await assert.rejects(
      traceFigure(ledger, "K07-1/05/g01", { figure: "purity", request: null }),
      /holds no prediction of lot K07; run predict K07 first/,
    );
  }, { requests: [] });
});

const STORED: StoredRole = {
  role: "signal_loss",
  trait: "loss_db_cm",
  wavelength_nm: 1582,
  polarisation: "TE",
  value: 0.4,
  u: 0.1,
  basis: "die",
  from_unit: "K07-1/05",
  distance: 0,
  readings_used: 2,
  note: null,
  share_own: 0,
  share_die: 0.5,
  share_wafer: 0.2,
  share_lot: 0.1,
  share_other_lots: 0.1,
  share_platform: 0.1,
};
const SHARES = { own: 0, die: 0.5, wafer: 0.2, lot: 0.1, lots: 0.1, prior: 0.1 };
const DERIVED: RoleTrait = { ...STORED, from: STORED.from_unit, used: [3, 7], refs: [], shares: SHARES };

Deno.test("a trait that resolves to anything but the stored value, to the last bit, is not traced", () => {
  assert.deepEqual(followRoles([STORED], [DERIVED], true, "r")[0]!.used, [3, 7]);
  const moved = [
    { value: 0.4 + 2 ** -54 },
    { u: 0.1000001 },
    { from: "K07-1/06" },
    { basis: "wafer" as const },
    { used: [3] },
    { shares: { ...SHARES, die: 0.4, own: 0.1 } },
  ];
  for (const change of moved) {
    assert.throws(() => followRoles([STORED], [{ ...DERIVED, ...change }], true, "r"), LedgerError);
  }
  assert.throws(() => followRoles([STORED], [], true, "r"), LedgerError);
});

Deno.test("with another platform a value may differ, but not what it is made of", () => {
  const [kept] = followRoles([STORED], [{ ...DERIVED, value: 0.5 }], false, "r");
  assert.deepEqual([kept!.value, kept!.used, kept!.followed], [0.4, [3, 7], true]);
  const [lost] = followRoles([STORED], [{ ...DERIVED, from: "K07-1" }], false, "r");
  assert.deepEqual([lost!.value, lost!.used, lost!.followed], [0.4, [], false]);
});

Deno.test("the nearest full id is the same one but for zeros, else the one that ends so, else one near in letters", () => {
  const known = ["K07-1/05", "K07-1/05/g01", "K07-1/05/g12", "K07-2/06", "K07-2/06/g01"];
  assert.equal(nearestFullId("k07-1/5/g12", known), "K07-1/05/g12");
  assert.equal(nearestFullId("5/g1", known), "K07-1/05/g01");
  assert.equal(nearestFullId("g01", known), null); // two end so
  assert.equal(nearestFullId("K07-1/05/h12", known), "K07-1/05/g12");
  assert.equal(nearestFullId("ZZZ", known), null);
});
