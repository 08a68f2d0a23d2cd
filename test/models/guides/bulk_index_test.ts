import assert from "node:assert/strict";
import {
  expansionFactor,
  groupIndex,
  SELLMEIER_SETS,
  type SellmeierId,
} from "../../../models/materials/mod.ts";
import { bulkIndexModel, mismatch } from "../../../models/guides/mod.ts";
import { nm } from "../../../shared/units.ts";
import type { ThreeWaves } from "../../../shared/vocabulary.ts";
import { assertClose } from "../../assert_close.ts";

const qpm = JSON.parse(Deno.readTextFileSync("fixtures/check-values/qpm.json"));
const any = { width_um: 5 };
const cln = bulkIndexModel("CLN", { TE: "o", TM: "e" });
const mgo = bulkIndexModel("MgO:CLN", { TE: "o", TM: "e" });
const ktp = bulkIndexModel("KTP", { TE: "y", TM: "z" });

function waves(lambdaP: number, process: string): ThreeWaves {
  const [polP, polS, polI] = process.split(/[>+]/) as ["TE" | "TM", "TE" | "TM", "TE" | "TM"];
  return { lambdaP, lambdaS: 2 * lambdaP, lambdaI: 2 * lambdaP, polP, polS, polI };
}
const period = (model: typeof cln, lambdaP: number, process: string, T: number) =>
  2 * Math.PI / mismatch(model, waves(lambdaP, process), T, any);

// Periods recomputed from the cited equations, to 1e-4 µm.
Deno.test("the mismatch gives the recomputed poling periods of every material, sign included", () => {
  const cases: [string, typeof cln, string][] = [
    ["CLN type 0, 1550->775, Jundt", cln, "TM>TM+TM"],
    ["CLN type 0, 1064->532, Jundt", cln, "TM>TM+TM"],
    ["CLN type II o->o+e, Edwards-Lawrence n_o with Jundt n_e", cln, "TE>TE+TM"],
    ["MgO:CLN type 0 1550->775, Gayer", mgo, "TM>TM+TM"],
    ["MgO:CLN type 0 1064->532, Gayer", mgo, "TM>TM+TM"],
    ["MgO:CLN type II o->o+e 775, Gayer", mgo, "TE>TE+TM"],
    ["KTP type II y->y+z, Konig-Wong y + Fradkin z", ktp, "TE>TE+TM"],
    ["KTP type 0 zzz 1064->532, Fradkin", ktp, "TM>TM+TM"],
  ];
  for (const [label, model, process] of cases) {
    const rows = qpm.periods.filter((p: { label: string }) => p.label === label);
    assert.ok(rows.length > 0, label);
    for (const { lambda_p_um, T_C, period_um } of rows) {
      assertClose(1e6 * period(model, lambda_p_um * 1e-6, process, T_C), period_um, { abs: 1e-4 }, label);
    }
  }
});

Deno.test("every recomputed period follows from its sets, the cross-checks included", () => {
  assert.equal(qpm.periods.length, 23);
  for (const { label, pump, signal, idler, lambda_p_um: L, T_C, period_um } of qpm.periods) {
    const n = (id: SellmeierId, um: number) => SELLMEIER_SETS[id].index(um, T_C);
    const grating = n(pump, L) / L - n(signal, 2 * L) / (2 * L) - n(idler, 2 * L) / (2 * L);
    assertClose(1 / grating, period_um, { abs: 1e-4 }, label);
  }
});

// König & Wong (2004) publish 1584 nm and 46.1 µm; recomputed 1582.18 nm and 46.1458 µm.
Deno.test("type II in KTP has its group velocities matched near 1584 nm at a period near 46.1 µm", () => {
  const balance = (lambda: number) =>
    2 * ktp.groupIndex("TE", lambda / 2, 25, any) - ktp.groupIndex("TE", lambda, 25, any) -
    ktp.groupIndex("TM", lambda, 25, any);
  let lo = 1.4e-6;
  let hi = 1.8e-6;
  assert.ok(balance(lo) > 0 && balance(hi) < 0);
  for (let k = 0; k < 60; k++) {
    const middle = (lo + hi) / 2;
    if (balance(middle) > 0) lo = middle;
    else hi = middle;
  }
  const [recomputed] = qpm.ktp_zero_group_velocity_mismatch;
  assertClose(lo * 1e6, recomputed.fundamental_um, { abs: 1e-5 });
  assertClose(1e6 * Math.abs(period(ktp, lo / 2, "TE>TE+TM", 25)), recomputed.period_um, { abs: 1e-4 });
  assertClose(lo * 1e6, 1.584, { abs: 0.006 }, "published wavelength");
  assertClose(1e6 * Math.abs(period(ktp, lo / 2, "TE>TE+TM", 25)), 46.1, { abs: 0.15 }, "published period");
  assertClose(ktp.groupIndex("TE", lo / 2, 25, any), recomputed.ng_pump, { abs: 2e-6 });
  assertClose(ktp.groupIndex("TM", lo, 25, any), recomputed.ng_z, { abs: 2e-6 });
});

Deno.test("phase-matching angles follow from the group indices", () => {
  const cases: [number, typeof cln, number][] = [[0.775, ktp, 48.553], [0.791, ktp, 45.019]];
  for (const [um, model, degrees] of cases) {
    const p = model.groupIndex("TE", um * 1e-6, 25, any);
    const s = model.groupIndex("TE", um * 2e-6, 25, any);
    const i = model.groupIndex("TM", um * 2e-6, 25, any);
    assertClose(-Math.atan((p - s) / (p - i)) * 180 / Math.PI, degrees, { abs: 2e-3 }, `${um} µm`);
  }
});

// Formula as stated with the recomputed values 0.12592 and 0.06875 nm/K (expansion 1.54e-5/K at 25 °C).
Deno.test("the phase-matched wavelength of CLN moves with temperature as recomputed", () => {
  for (const [key, fundamental] of [["CLN_1550", nm(1550)], ["CLN_1064", nm(1064)]] as const) {
    // The grating of 25 °C, grown by expansion, is met at another wavelength at 25 ± 0.5 °C.
    const grating = mismatch(cln, waves(fundamental / 2, "TM>TM+TM"), 25, any);
    const matched = (T: number) => {
      let lo = fundamental * 0.99;
      let hi = fundamental * 1.01;
      for (let k = 0; k < 80; k++) {
        const middle = (lo + hi) / 2;
        const left = mismatch(cln, waves(middle / 2, "TM>TM+TM"), T, any) * expansionFactor("CLN", "x", T);
        if (left > grating) lo = middle;
        else hi = middle;
      }
      return (lo + hi) / 2;
    };
    assertClose(1e9 * (matched(25.5) - matched(24.5)), qpm.tuning_nm_per_K[key], { abs: 1e-4 }, key);
  }
});

// Fejer et al. (1992), formula from memory; numbers recomputed.
Deno.test("acceptance and pair bandwidths follow from the group indices", () => {
  const L = 10e-3;
  const ng = (material: "CLN" | "KTP", axis: "o" | "e" | "y" | "z", lambda: number) =>
    groupIndex(material, axis, lambda, 25);
  const shg = (l: number) => 0.442946471 * l * l / (L * (ng("CLN", "e", l / 2) - ng("CLN", "e", l)));
  assertClose(1e9 * shg(nm(1550)), qpm.bandwidths.shg_wavelength.CLN_1550_L10mm_nm, { abs: 2e-5 });
  assertClose(1e9 * shg(nm(1064)), qpm.bandwidths.shg_wavelength.CLN_1064_L10mm_nm, { abs: 2e-5 });
  const pairs = 0.8858929 * nm(1582) ** 2 /
    (L * Math.abs(ng("KTP", "y", nm(1582)) - ng("KTP", "z", nm(1582))));
  assertClose(1e9 * pairs, qpm.bandwidths.spdc_typeII_signal.KTP_1582_L10mm_nm, { abs: 1e-3 });
});

Deno.test("a bulk guide answers as the crystal whatever its geometry, and its slice agrees", () => {
  const slice = ktp.slice("TM", 60, any);
  for (const lambda of [0.5e-6, 0.791e-6, 1.582e-6]) {
    assert.equal(slice.n(lambda), ktp.nEff("TM", lambda, 60, { width_um: 1 }));
    assert.equal(slice.ng(lambda), ktp.groupIndex("TM", lambda, 60, { width_um: 9 }));
    assert.equal(slice.ng(lambda), groupIndex("KTP", "z", lambda, 60));
  }
  assert.equal(ktp.sensitivity("TM", 1e-6, 25, any, "width_um"), 0);
  assert.deepEqual(Object.keys(ktp.range("TE")).sort(), ["lambda", "temperatureC"]);
  assert.match(ktp.remark("TE", 0.8e-6, 25)!, /beyond_published_range/);
  assert.equal(ktp.remark("TM", 0.8e-6, 25), null);
});

Deno.test("a bulk guide refuses an axis that the material lacks, and what the material refuses", () => {
  assert.throws(() => bulkIndexModel("KTP", { TE: "o", TM: "e" }), /RangeError.*KTP/);
  assert.throws(() => ktp.slice("TM", 300, any).n(1e-6), RangeError);
  assert.throws(() => mismatch(ktp, waves(0.44e-6, "TM>TM+TM"), 25, any), /RangeError.*440 nm/);
});
