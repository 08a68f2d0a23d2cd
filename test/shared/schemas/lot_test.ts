import assert from "node:assert/strict";
import { lotJsonSchema, lotSchema } from "../../../shared/schemas/lot.ts";

const LOT = { lot: "K07", platform: "ti-ln-zcut", wafers: [{ wafer: "K07-1" }] };

/** Issues as `path: message`. */
function issues(change: object): string[] {
  const checked = lotSchema.safeParse({ ...LOT, ...change });
  return checked.success ? [] : checked.error.issues.map((i) => `${i.path.join(".")}: ${i.message}`);
}

Deno.test("the lot of the format's own example is accepted, with defaults for what it leaves out", () => {
  const example = {
    lot: "K07",
    platform: "ti-ln-zcut",
    started: "2026-09-14",
    wafers: [{ wafer: "K07-1", diameter_mm: 76.2, substrate_batch: "S-311" }],
    steps: [{
      wafer: "K07-1",
      order: 1,
      step: "titanium-deposition",
      tool: "evap-2",
      recipe: "R31",
      finished: "2026-09-15T10:20:00Z",
      settings: { thickness_nm: 78 },
    }],
    coatings: [
      { coating_run: "C118", facet: "in", dies: ["K07-1/05", "K07-1/06"] },
      { coating_run: "C119", facet: "out", dies: ["K07-1/05"] },
    ],
    unavailable: [{ die: "K07-1/08", reason: "cut for loss measurement" }],
    columns: {
      cutback: {
        "IL (dB)": "insertion_loss_db",
        "len [cm]": { to: "length_mm", times: 10 },
        "T [K]": { to: "temperature_c", plus: -273.15 },
      },
    },
    reading_style: {
      tuning: {
        delimiter: ";",
        decimal: ",",
        skip_lines: 12,
        units_row: true,
        constants: { wafer: "K07-1" },
        name_pattern: "(?<die>\\d+)_(?<guide>g\\d+)_(?<scan>\\w+)",
      },
    },
  };
  assert.deepEqual(lotSchema.parse(example), example);
  assert.deepEqual(lotSchema.parse(LOT), {
    ...LOT,
    steps: [],
    coatings: [],
    unavailable: [],
    columns: {},
    reading_style: {},
  });
});

Deno.test("an unknown key is an error that names the key and the nearest known one", () => {
  assert.match(issues({ wafer: [] })[0]!, /unknown key "wafer" \(did you mean "wafers"\?\); known: .*steps/);
  const step = { wafer: "K07-1", order: 1, step: "etch", receipe: "R1" };
  assert.match(issues({ steps: [step] })[0]!, /^steps\.0: unknown key "receipe" \(did you mean "recipe"\?\)/);
});

Deno.test("a wafer listed twice, and one that is not listed, are errors at their place", () => {
  assert.deepEqual(issues({ wafers: [{ wafer: "A" }, { wafer: "A" }] }), [
    "wafers.1.wafer: this wafer is listed before; need each wafer once",
  ]);
  assert.deepEqual(issues({ steps: [{ wafer: "K07-01", order: 1, step: "etch" }] }), [
    'steps.0.wafer: no such wafer (did you mean "K07-1"?); "wafers" lists K07-1',
  ]);
  assert.match(
    issues({ unavailable: [{ die: "X/05", reason: "broken" }] })[0]!,
    /^unavailable\.0\.die: no such wafer/,
  );
});

Deno.test("ids are text, and a missing key is called missing", () => {
  assert.deepEqual(issues({ wafers: [{ wafer: 5 }] }), [
    "wafers.0.wafer: need text in quotes, as ids are text",
  ]);
  assert.deepEqual(issues({ platform: undefined }), ["platform: the key is missing; need text"]);
});

Deno.test("dates have to exist, lot ids have to be fit for file names", () => {
  for (const started of ["2026-02-30", "14.9.2026", "2026-9-14"]) {
    assert.match(issues({ started })[0]!, /need a date/);
  }
  for (const lot of ["", ".", "..", "a/b", "a\\b", "-x", "a b", "a\u0000", "x".repeat(65)]) {
    assert.ok(issues({ lot }).length > 0, JSON.stringify(lot));
  }
  const step = { wafer: "K07-1", order: 1, step: "etch" };
  assert.deepEqual(issues({ steps: [{ ...step, finished: "2026-09-15T10:20:00+02:00" }] }), []);
  assert.match(issues({ steps: [{ ...step, finished: "yesterday" }] })[0]!, /ISO 8601/);
});

Deno.test("columns and styles have to name kinds, files or columns that can be", () => {
  assert.match(issues({ columns: { cutbak: {} } })[0]!, /no kind of reading .*did you mean "cutback"/);
  assert.match(
    issues({ columns: { cutback: { L: "length" } } })[0]!,
    /there is no such column \(did you mean "length_mm"\?\); columns of cutback: wafer/,
  );
  assert.match(issues({ columns: { cutback: { D: { to: "die", plus: 1 } } } })[0]!, /this column holds text/);
  assert.match(
    issues({ columns: { cutback: { L: { to: "length_mm", times: 0 } } } })[0]!,
    /every value the same/,
  );
  assert.deepEqual(issues({ columns: { "tuning-05_g12": {}, "walls-2.parquet": {}, guides: {} } }), []);
  assert.match(issues({ reading_style: { tuning: { delimiter: ";;" } } })[0]!, /delimiter/);
});

Deno.test("the JSON Schema of lot.json is strict and has every key", () => {
  const schema = lotJsonSchema() as { properties: object; required: string[]; additionalProperties: boolean };
  assert.deepEqual(schema.required, ["lot", "platform", "wafers"]);
  assert.equal(schema.additionalProperties, false);
  assert.ok("reading_style" in schema.properties && "coatings" in schema.properties);
});
