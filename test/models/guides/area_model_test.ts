import assert from "node:assert/strict";
import {
  canonicalProcess,
  constantAreaModel,
  processName,
  propagationAxis,
  tableAreaModel,
} from "../../../models/guides/mod.ts";
import { assertClose } from "../../assert_close.ts";

Deno.test("a constant area holds for every process and geometry, in m²", () => {
  const area = constantAreaModel(40);
  assertClose(area.effectiveArea("TE>TE+TM", { width_um: 3 }), 40e-12, { rel: 1e-15 });
  assertClose(area.effectiveArea("TM>TM+TM", { width_um: 9 }), 40e-12, { rel: 1e-15 });
  assert.throws(() => area.effectiveArea("TE->TM", { width_um: 3 }), /RangeError.*pump>signal\+idler/);
  for (const bad of [0, -1, NaN, Infinity]) assert.throws(() => constantAreaModel(bad), RangeError);
});

Deno.test("signal and idler share a process whatever their order", () => {
  assert.equal(canonicalProcess("TE>TM+TE"), "TE>TE+TM");
  assert.equal(processName("TM", "TM", "TE"), "TM>TE+TM");
  assert.throws(() => canonicalProcess("TE>TM+TX"), RangeError);
});

Deno.test("an area table gives its nodes, interpolates smoothly, and refuses what is beyond it", () => {
  const rows = [3, 4, 5].flatMap((width_um) =>
    [80, 100].map((titanium_nm) => ({
      process: "TE>TM+TE",
      width_um,
      titanium_nm,
      effective_area_um2: 30 * Math.exp(-0.1 * width_um + 0.002 * titanium_nm),
    }))
  );
  const area = tableAreaModel(rows);
  for (const r of rows) {
    assertClose(area.effectiveArea("TE>TE+TM", r), r.effective_area_um2 * 1e-12, { rel: 1e-14 });
  }
  // An exponential is a straight line in the logarithm: exact between the nodes as well.
  assertClose(
    area.effectiveArea("TE>TM+TE", { width_um: 3.3, titanium_nm: 93 }),
    30e-12 * Math.exp(-0.33 + 0.186),
    { rel: 1e-13 },
  );
  assertClose(
    tableAreaModel(rows, { titanium_nm: 93 }).effectiveArea("TE>TM+TE", { width_um: 3.3 }),
    30e-12 * Math.exp(-0.33 + 0.186),
    { rel: 1e-13 },
  );
  assert.throws(() => area.effectiveArea("TE>TE+TM", { width_um: 2.9, titanium_nm: 90 }), /width_um 2\.9/);
  assert.throws(() => area.effectiveArea("TE>TE+TM", { width_um: 4 }), /titanium_nm is not known/);
  assert.throws(() => area.effectiveArea("TM>TM+TM", { width_um: 4 }), /RangeError.*the table has TE>TE\+TM/);
});

Deno.test("an area table with a hole or an impossible area is refused", () => {
  const row = { process: "TM>TM+TM", width_um: 3, effective_area_um2: 20 };
  assert.throws(() => tableAreaModel([]), RangeError);
  assert.throws(() => tableAreaModel([{ ...row, effective_area_um2: 0 }]), /RangeError.*found 0 µm²/);
  assert.throws(
    () =>
      tableAreaModel([
        { ...row, titanium_nm: 80 },
        { ...row, titanium_nm: 90 },
        { ...row, width_um: 4, titanium_nm: 80 },
      ]),
    /RangeError.*no row for width_um = 4, titanium_nm = 90/,
  );
});

Deno.test("the guide runs along the axis that neither polarisation sees", () => {
  assert.equal(propagationAxis("KTP", { TE: "y", TM: "z" }), "x");
  assert.equal(propagationAxis("KTP", { TE: "z", TM: "x" }), "y");
  assert.equal(propagationAxis("CLN", { TE: "y", TM: "z" }), "o");
  assert.equal(propagationAxis("CLN", { TE: "z", TM: "x" }), "o");
  assert.equal(propagationAxis("MgO:CLN", { TE: "o", TM: "e" }), "o");
  assert.equal(propagationAxis("CLN", { TE: "x", TM: "y" }), "z");
  assert.equal(propagationAxis("CLN", { TE: "o", TM: "o" }), "z");
  assert.throws(() => propagationAxis("CLN", { TE: "z", TM: "e" }), /RangeError.*both see z/);
  assert.throws(() => propagationAxis("KTP", { TE: "y", TM: "y" }), RangeError);
  assert.throws(() => propagationAxis("KTP", { TE: "o", TM: "z" }), RangeError);
});
