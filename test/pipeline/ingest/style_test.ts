import assert from "node:assert/strict";
import { assertClose } from "../../assert_close.ts";
import { CUTBACK, ingestOne } from "./folder.ts";

Deno.test("columns rename headings and turn their units: times, then plus", async () => {
  const head = 'die;guide;"IL (dB)";len [cm];T [K];wafer;wavelength_nm;polarisation\n';
  const lot = {
    columns: {
      // The last one is a column, but not of this kind: the heading is left out.
      cutback: {
        "IL (dB)": "insertion_loss_db",
        "len [cm]": { to: "length_mm", times: 10 },
        "T [K]": { to: "temperature_c", plus: -273.15 },
      },
    },
    reading_style: { cutback: { delimiter: ";" } },
  };
  const { rows } = await ingestOne("cutback.csv", `${head}05;g12;1.5;2;300;K07-1;1550;TE\n`, lot);
  assert.deepEqual([rows[0]!["insertion_loss_db"], rows[0]!["length_mm"]], [1.5, 20]);
  assert.ok(!("temperature_c" in rows[0]!));
  const scan = "wafer,die,guide,scan,process,polarisations,T [K],wavelength_nm,power_rel\n" +
    "K07-1,05,g12,a,second-harmonic,TM+TE>TE,308.15,1582,-0.1\n";
  const kelvin = { columns: { tuning: { "T [K]": { to: "temperature_c", plus: -273.15 } } } };
  const tuning = await ingestOne("tuning.csv", scan, kelvin);
  assertClose(tuning.rows[0]!["temperature_c"] as number, 35, { abs: 1e-10 });
  assert.equal(tuning.rows[0]!["polarisations"], "TE+TM>TE"); // the order of the inputs is free
});

Deno.test("a trace with preamble, units row, decimal commas and its guide in the name is read", async () => {
  const lot = {
    columns: { tuning: { "λ (nm)": "wavelength_nm", P: "power_rel", T: "temperature_c" } },
    reading_style: {
      tuning: {
        delimiter: ";",
        decimal: ",",
        skip_lines: 3,
        units_row: true,
        constants: { wafer: "K07-1", process: "second-harmonic", polarisations: "TE+TM>TE" },
        name_pattern: "(?<die>\\d+)_(?<guide>g\\d+)_(?<scan>\\w+)",
      },
    },
  };
  const text = `scan of "05"\r\n\r\n----\r\nλ (nm);P;T\r\nnm;a.u.;°C\r\n1581,5;0,1;35,0\r\n1582;0,9;35\r\n`;
  const { rows } = await ingestOne("tuning-05_g12_up.csv", text, lot);
  assert.deepEqual(
    rows.map((row) => [row["unit"], row["scan"], row["wavelength_nm"], row["power_rel"], row["source_line"]]),
    [["K07-1/05/g12", "up", 1581.5, 0.1, 6], ["K07-1/05/g12", "up", 1582, 0.9, 7]],
  );
});

Deno.test("what is given for a file wins over what is given for its kind, entry by entry", async () => {
  const lot = {
    reading_style: {
      cutback: { delimiter: ";", skip_lines: 1 },
      "cutback-2": { skip_lines: 2 },
      "cutback-2.csv": { constants: { polarisation: "TM" } },
    },
  };
  const text = "x\ny\nwafer;die;guide;wavelength_nm;length_mm;insertion_loss_db\nK07-1;05;g12;1550;20;1.5\n";
  const { rows } = await ingestOne("cutback-2.csv", text, lot);
  assert.deepEqual(rows.map((row) => [row["polarisation"], row["source_line"]]), [["TM", 4]]);
});

Deno.test("a stated unit that lot.json does not turn into the column's is refused", async () => {
  const head = CUTBACK.replace("length_mm", "len [cm]");
  const row = "K07-1,05,g12,1550,TE,2,1.5\n";
  await assert.rejects(
    ingestOne("cutback.csv", head + row, { columns: { cutback: { "len [cm]": "length_mm" } } }),
    {
      name: "InputError",
      message:
        'Cannot read readings/cutback.csv:1: heading "len [cm]" states its unit as cm, which "length_mm" needs "times": 10 for; correct "columns" in lot.json',
    },
  );
  const units = { reading_style: { cutback: { units_row: true } } };
  await assert.rejects(ingestOne("cutback.csv", `${CUTBACK},,,µm,,mm,dB\n${row}`, units), {
    message:
      /cutback\.csv:2: heading "wavelength_nm" states its unit as µm, which "wavelength_nm" needs "times": 1000 for/,
  });
});

Deno.test("styles that cannot be meant are refused, each with its reason", async () => {
  const cases: [object, RegExp][] = [
    [{ name_pattern: "(?<die>\\d+" }, /"name_pattern" .* is no regular expression/],
    [{ name_pattern: "(?<die>(\\d+)+)x" }, /repeats a part that itself repeats or has alternatives/],
    [{ name_pattern: "(?<die>a|a)*x" }, /repeats a part that itself repeats or has alternatives/],
    [{ name_pattern: "(?<die>\\d+)\\-" }, /does not match the file's stem/],
    [{ name_pattern: "(?<die>\\d+)_" }, /does not match the file's stem "cutback"/],
    [
      { name_pattern: "cut(?<dye>back)" },
      /gives column "dye" "back", but cutback has no such column \(did you mean "die"\?\)/,
    ],
    [{ name_pattern: "cutback" }, /has no named group/],
    [{ constants: { die: 5 } }, /gives column "die" "5", a number; need text in quotes, as ids are text/],
    [{ constants: { length_mm: -2 } }, /gives column "length_mm" "-2", need a number above 0/],
    [
      { constants: { wafer: "K07-1" } },
      /column "wafer" comes twice, from heading "wafer" and from "constants"/,
    ],
    [{ delimeter: ";" }, /unknown key "delimeter" \(did you mean "delimiter"\?\)/],
    [{ decimal: ";" }, /reading_style\.cutback\.decimal/],
  ];
  for (const [style, message] of cases) {
    await assert.rejects(
      ingestOne("cutback.csv", CUTBACK, { reading_style: { cutback: style } }),
      { name: "InputError", message },
    );
  }
});

Deno.test("a style for a file that is not there gets a remark", async () => {
  const { result } = await ingestOne("cutback.csv", CUTBACK, {
    reading_style: { tuning: { skip_lines: 2 } },
  });
  assert.deepEqual(result.remarks.filter((r) => r.code === "style_without_file").map((r) => r.statement), [
    '"reading_style" speaks of "tuning", and there is no such file',
  ]);
});
