import assert from "node:assert/strict";
import { guideRowJsonSchema, guideRowSchema } from "../../../shared/schemas/guides.ts";
import { isNumberColumn } from "../../../shared/schemas/lot.ts";
import {
  kindOfStem,
  READING_KINDS,
  READING_SCHEMAS,
  readingJsonSchema,
} from "../../../shared/schemas/readings.ts";

const COLUMNS: Record<string, string> = {
  cutback: "wafer die guide wavelength_nm polarisation length_mm insertion_loss_db u_insertion_loss_db",
  fringes: "wafer die guide wavelength_nm polarisation contrast u_contrast facet_state",
  poling: "wafer die guide window_start_mm window_length_mm domains duty_mean duty_sd merged",
  walls: "wafer die guide position_um",
  facets: "coating_run facet wavelength_nm reflectivity u_reflectivity",
  modes: "wafer die guide wavelength_nm polarisation mfd_x_um mfd_y_um u_mfd_um",
  geometry: "wafer die guide z_mm quantity value u_value",
  tuning: "wafer die guide scan process polarisations temperature_c wavelength_nm power_rel",
  outcomes: "wafer die guide request figure value u_value",
};

Deno.test("every kind has the columns of the format, and measured_at and instrument", () => {
  assert.deepEqual(Object.keys(COLUMNS), [...READING_KINDS]);
  for (const kind of READING_KINDS) {
    const columns = Object.keys(READING_SCHEMAS[kind].shape);
    assert.deepEqual(columns, [...COLUMNS[kind]!.split(" "), "measured_at", "instrument"]);
  }
});

Deno.test("every column says what would be right, and only it is required that has no u_ in front", () => {
  for (const kind of READING_KINDS) {
    const schema = readingJsonSchema(kind) as { properties: Record<string, object>; required: string[] };
    for (const [column, field] of Object.entries(schema.properties)) {
      assert.match(JSON.stringify(field), /"description":"[^"]{4,}/, `${kind}.${column}`);
      const optional = column.startsWith("u_") || column === "measured_at" || column === "instrument";
      assert.equal(schema.required.includes(column), !optional, `${kind}.${column}`);
      assert.equal(
        isNumberColumn(kind, column),
        JSON.stringify(field).includes('"number"') || JSON.stringify(field).includes('"integer"'),
      );
    }
  }
  assert.equal((guideRowJsonSchema() as { required: string[] }).required.length, 11);
});

Deno.test("a stem names its kind alone or before a hyphen", () => {
  assert.deepEqual(
    ["cutback", "cutback-2", "cutback-k07-3", "tuning-05_g12_a"].map(kindOfStem),
    ["cutback", "cutback", "cutback", "tuning"],
  );
  assert.deepEqual(
    ["cutback2", "cutback_2", "Cutback", "", "-cutback", "constructor"].map(kindOfStem),
    Array(6).fill(null),
  );
});

Deno.test("limits are where the format puts them, and the limits themselves are possible", () => {
  const fringe = {
    wafer: "W",
    die: "1",
    guide: null,
    wavelength_nm: 1550,
    polarisation: "TE",
    contrast: 0.2,
    facet_state: "bare",
  };
  const fits = (change: object) => READING_SCHEMAS.fringes.safeParse({ ...fringe, ...change }).success;
  assert.ok(
    fits({}) && fits({ contrast: 0 }) && fits({ contrast: 1 }) && fits({ wavelength_nm: 200 }) &&
      fits({ wavelength_nm: 20000 }),
  );
  for (
    const change of [{ contrast: -1e-9 }, { contrast: 1.0001 }, { wavelength_nm: 199.9 }, {
      wavelength_nm: 20000.1,
    }]
  ) {
    assert.ok(!fits(change), JSON.stringify(change));
  }
  for (const bad of [NaN, Infinity, "0.2", null]) assert.ok(!fits({ contrast: bad }), String(bad));
  assert.ok(
    fits({ measured_at: "2026-09-15" }) && fits({ measured_at: "2026-09-15T10:20:00" }) &&
      !fits({ measured_at: "15.9.26" }),
  );
  assert.ok(!fits({ extra: 1 }));
  const guide = {
    wafer: "W",
    die: "1",
    x_mm: 0,
    y_mm: 0,
    guide: "g",
    group: null,
    width_um: 7,
    period_um: 9,
    length_mm: 20,
    poled_from_mm: 0,
    poled_length_mm: 0,
  };
  assert.ok(guideRowSchema.safeParse(guide).success);
  assert.ok(!guideRowSchema.safeParse({ ...guide, length_mm: 0 }).success);
});
