import assert from "node:assert/strict";
import { checkRequest, isDegenerate, type Request, requestSchema } from "../../../shared/schemas/request.ts";
import { assertClose } from "../../assert_close.ts";

const example = JSON.parse(Deno.readTextFileSync("fixtures/requests/heralded-1582.json"));
const parse = (change: Record<string, unknown>): Request => requestSchema.parse({ ...example, ...change });
function problems(change: Record<string, unknown>) {
  const checked = checkRequest(parse(change));
  return "problems" in checked ? checked.problems.map((p) => `${p.field}: ${p.reason}`) : [];
}
function checked(change: Record<string, unknown>) {
  const answer = checkRequest(parse(change));
  assert.ok(!("problems" in answer), JSON.stringify(answer));
  return answer;
}

Deno.test("checkRequest() takes the example request", () => {
  const r = checked({});
  assert.equal(r.processKey, "TE>TE+TM");
  assert.equal(r.pulsed, true);
  assert.deepEqual(r.requirements[0], { figure: "heralding_signal", atLeast: 0.45, atMost: Infinity });
  assert.equal(isDegenerate(r.waves), true);
});

Deno.test("checkRequest() puts a small miss of energy conservation right and refuses a larger one", () => {
  const idler = { ...example.idler, wavelength_nm: 1582.04 };
  assertClose(checked({ idler }).waves.lambdaI, 1582e-9, { rel: 1e-12 });
  const found = problems({ idler: { ...example.idler, wavelength_nm: 1582.06 } });
  assert.match(found[0]!, /^idler\.wavelength_nm: 1582\.06 nm breaks energy conservation/);
});

Deno.test("checkRequest() finds the missing wavelength of a sum frequency and of a second harmonic", () => {
  const base = {
    process: "sum-frequency",
    pump: undefined,
    require: [],
    signal: { wavelength_nm: 1950, average_power_mw: 300 },
    idler: { wavelength_nm: 1550 },
  };
  assertClose(checked(base).waves.lambdaP, 1e-9 / (1 / 1950 + 1 / 1550), { rel: 1e-12 });
  const shg = checked({
    ...base,
    process: "second-harmonic",
    signal: { wavelength_nm: 1550 },
    idler: undefined,
  });
  assertClose(shg.waves.lambdaP, 775e-9, { rel: 1e-15 });
  assertClose(shg.waves.lambdaI, 1550e-9, { rel: 1e-15 });
});

Deno.test("checkRequest() refuses figures that can't exist, naming the field", () => {
  const cw = { ...example.pump, fwhm_ps: undefined, repetition_mhz: undefined };
  assert.match(
    problems({ pump: cw })[0]!,
    /^require\[1\]\.figure: "purity" can't exist: not a figure of a continuous-wave/,
  );
  assert.match(
    problems({ require: [{ figure: "brightness", at_least: 1 }] })[0]!,
    /^require\[0\]\.figure: "brightness" is not a figure/,
  );
  assert.match(problems({ require: [{ figure: "purity" }] })[0]!, /has no limit/);
  assert.match(
    problems({ require: [{ figure: "peak_conversion", at_least: 0.5 }] })[0]!,
    /not a figure of pair-generation/,
  );
  assert.match(problems({ order_by: "beauty" })[0]!, /^order_by/);
});

Deno.test("checkRequest() sorts upwards by a figure that is limited from above", () => {
  const r = checked({ require: [{ figure: "g2_heralded", at_most: 0.1 }], order_by: "g2_heralded" });
  assert.equal(r.descending, false);
  assert.equal(checked({ order_by: "purity" }).descending, true);
});

Deno.test("checkRequest() refuses contradictory pulse data", () => {
  assert.match(problems({ pump: { ...example.pump, fwhm_nm: 1 } })[0]!, /^pump\.fwhm_nm/);
  assert.match(
    problems({ pump: { ...example.pump, repetition_mhz: undefined } })[0]!,
    /^pump\.repetition_mhz/,
  );
  assert.match(problems({ pump: { ...example.pump, shape: "spectrum" } })[0]!, /^pump\.spectrum/);
});

Deno.test("requestSchema refuses an unknown key instead of ignoring a misspelt one", () => {
  assert.equal(
    requestSchema.safeParse({ ...example, pump: { ...example.pump, fwhm_fs: 100 } }).success,
    false,
  );
  assert.equal(requestSchema.safeParse({ ...example, oven_c: [90, 20] }).success, false);
});

Deno.test("checkRequest() wants the power of an input for peak_conversion, not that of the wave that is made", () => {
  const doubling = {
    process: "second-harmonic",
    pump: { average_power_mw: 20 },
    signal: { wavelength_nm: 1550 },
    idler: undefined,
    require: [{ figure: "peak_conversion", at_least: 0.1 }],
  };
  assert.match(problems(doubling)[0]!, /^signal\.average_power_mw: missing/);
  const signal = { wavelength_nm: 1550, average_power_mw: 20 };
  assert.deepEqual(problems({ ...doubling, signal }), []);
});

Deno.test("checkRequest() refuses a limit on g2_heralded that nothing meets", () => {
  const found = problems({ require: [{ figure: "g2_heralded", at_most: 0 }] });
  assert.match(found[0]!, /^require\[0\]\.at_most: 0 is a limit that no source/);
});
