import assert from "node:assert/strict";
import { CUTBACK, GUIDES, ingestOne, Scene } from "./folder.ts";

const GOOD = "K07-1,05,g12,1550,TE,20,1.5";

/** The message of the InputError that a file of readings causes. */
async function refusal(name: string, content: string | Uint8Array, lot: object = {}): Promise<string> {
  try {
    await ingestOne(name, content, lot);
  } catch (error) {
    assert.equal((error as Error).name, "InputError", String((error as Error).stack));
    return (error as Error).message;
  }
  assert.fail(`${name} was taken in`);
}

/** Column, value, reason and wanted of the only row that a bad cell keeps aside. */
async function keptAside(row: string, head = CUTBACK, name = "cutback.csv") {
  const { quarantine, counts } = await ingestOne(name, `${head}${row}\n`);
  assert.deepEqual(counts, [1, 0, 1], row);
  const { column, value, reason, wanted, source_line, file_name } = quarantine[0]!;
  assert.deepEqual([source_line, file_name], [2, `readings/${name}`]);
  return { column, value, reason, wanted };
}

Deno.test("an empty file, and one of blank lines, is refused with the headings that are needed", async () => {
  const headings = /readings\/cutback\.csv: it has no line of headings; need wafer,die,guide,wavelength_nm/;
  assert.match(await refusal("cutback.csv", ""), headings);
  assert.match(await refusal("cutback.csv", "\n\r\n  \n,,\n"), headings);
  const skipped = await refusal("cutback.csv", "a\nb\n", { reading_style: { cutback: { skip_lines: 9 } } });
  assert.match(skipped, /after the 9 lines that "skip_lines" leaves out/);
});

Deno.test("a file with headings only is taken in with no rows", async () => {
  assert.deepEqual((await ingestOne("cutback.csv", CUTBACK)).counts, [0, 0, 0]);
});

Deno.test("wrong headings are refused with file, line, what is missing, what is there and what is near", async () => {
  const message = await refusal("cutback.csv", `${CUTBACK.replace("length_mm", "lenght_mm")}${GOOD}\n`);
  assert.match(
    message,
    /^Cannot read readings\/cutback\.csv:1: column "length_mm" is missing; found headings "wafer", /,
  );
  assert.match(
    message,
    /nearest: "lenght_mm" for "length_mm"; rename, or map in lot\.json as in "columns": \{ "cutback": \{ "lenght_mm": "length_mm" \} \}/,
  );
});

Deno.test("a column that comes twice is refused", async () => {
  assert.match(
    await refusal("cutback.csv", CUTBACK.replace("\n", ",length_mm\n")),
    /column "length_mm" comes twice/,
  );
  const map = { columns: { cutback: { L: "length_mm" } } };
  assert.match(
    await refusal("cutback.csv", CUTBACK.replace("\n", ",L\n"), map),
    /column "length_mm" comes twice/,
  );
});

Deno.test("headings of objects' own properties are only headings", async () => {
  const head = CUTBACK.replace("\n", ",__proto__,constructor,toString\n");
  const { rows, result } = await ingestOne("cutback.csv", `${head}${GOOD},1,2,3\n`);
  assert.equal(rows.length, 1);
  assert.equal(result.remarks.filter((r) => r.code === "extra_column").length, 3);
  const mapped = JSON.parse('{"cutback":{"__proto__":"length_mm"}}');
  assert.match(
    await refusal("cutback.csv", head.replace("length_mm,", ""), { columns: mapped }),
    /"length_mm" is missing/,
  );
});

Deno.test("semicolons and tabs that nobody declared are refused with what to put into lot.json", async () => {
  const semicolons = await refusal("cutback.csv", `${CUTBACK}${GOOD}`.replaceAll(",", ";"));
  assert.match(semicolons, /cutback\.csv:1: the headings are separated by ";", need ","/);
  assert.match(semicolons, /"reading_style": \{ "cutback": \{ "delimiter": ";" \} \}, with "decimal": ","/);
  const tabs = await refusal("cutback.csv", `${CUTBACK}${GOOD}`.replaceAll(",", "\t"));
  assert.match(tabs, /separated by a tab, need ","; declare it in lot\.json: .*"delimiter": "\\t"/);
  const commas = await refusal("cutback.csv", `${CUTBACK}${GOOD}`, {
    reading_style: { cutback: { delimiter: ";" } },
  });
  assert.match(commas, /separated by ",", need ";"/);
});

Deno.test("decimal commas that nobody declared are refused; declared they are read", async () => {
  const text = `${CUTBACK}${GOOD}\n${GOOD}\n`.replaceAll(",", ";").replaceAll("1.5", "1,5");
  const message = await refusal("cutback.csv", text, { reading_style: { cutback: { delimiter: ";" } } });
  assert.match(
    message,
    /cutback\.csv:2, column "insertion_loss_db": found decimal commas such as "1,5", need a point/,
  );
  assert.match(message, /"reading_style": \{ "cutback": \{ "decimal": "," \} \}/);
  const style = { reading_style: { cutback: { delimiter: ";", decimal: "," } } };
  const { rows } = await ingestOne("cutback.csv", text, style);
  assert.deepEqual(rows.map((row) => [row["insertion_loss_db"], row["wavelength_nm"]]), [[1.5, 1550], [
    1.5,
    1550,
  ]]);
});

Deno.test("one number with a comma is a slip: its row is kept aside", async () => {
  const text = `${CUTBACK}${GOOD}\n${GOOD}\n${GOOD}\n${GOOD.replace("1.5", '"1,5"')}\n`;
  const { quarantine, counts } = await ingestOne("cutback.csv", text);
  assert.deepEqual(counts, [4, 3, 1]);
  assert.deepEqual([quarantine[0]!["value"], quarantine[0]!["reason"]], ["1,5", "the number has a comma"]);
  assert.match(String(quarantine[0]!["wanted"]), /written with a decimal point/);
});

Deno.test("byte order mark, Windows line ends, blank lines and quotes change neither values nor line numbers", async () => {
  const text = `\ufeff${CUTBACK}\n${GOOD}\n\n\n"K07-1", 05 ,"g12",1550,TE,20,1.5\n` +
    `"K07-1",05,"g\n12",1550,TE,20,1.5\n${GOOD}`;
  const { rows, quarantine, counts } = await ingestOne("cutback.csv", text.replaceAll("\n", "\r\n"));
  assert.deepEqual(counts, [4, 3, 1]);
  assert.deepEqual(rows.map((row) => row["source_line"]), [3, 6, 9]);
  assert.deepEqual([quarantine[0]!["source_line"], quarantine[0]!["column"]], [7, "guide"]);
});

Deno.test("bytes that are no UTF-8 are refused with their line; UTF-16 is named", async () => {
  const bytes = new TextEncoder().encode(`${CUTBACK}${GOOD}\n${GOOD}\n`);
  bytes[bytes.length - 3] = 0xb5; // a Latin-1 µ
  assert.match(
    await refusal("cutback.csv", bytes),
    /cutback\.csv:3: the line holds bytes that are no UTF-8 text/,
  );
  const utf16 = new Uint8Array([0xff, 0xfe, ...[...CUTBACK].flatMap((c) => [c.charCodeAt(0), 0])]);
  assert.match(await refusal("cutback.csv", utf16), /the file is UTF-16 text; save the file as UTF-8/);
  assert.match(await refusal("cutback.csv", CUTBACK.replace("\n", "\r") + GOOD), /lone carriage return/);
});

Deno.test("a line of ten megabytes is kept aside, and the rows around it are read", async () => {
  const long = "K07-1,05,g12,1550,TE,20," + "1".repeat(1e7);
  const { rows, quarantine, counts } = await ingestOne(
    "cutback.csv",
    `${CUTBACK}${GOOD}\n${long}\n${GOOD}\n`,
  );
  assert.deepEqual(counts, [3, 2, 1]);
  assert.deepEqual(rows.map((row) => row["source_line"]), [2, 4]);
  assert.equal(quarantine[0]!["source_line"], 3);
  assert.match(String(quarantine[0]!["reason"]), /a line longer than a megabyte/);
  assert.match(String(quarantine[0]!["row"]), /^K07-1,05,g12/);
});

Deno.test("a quote that is never closed is refused, however long the rest is", async () => {
  const open = `${CUTBACK}${GOOD}\nK07-1,05,"g12,1550,TE,20,1.5\n`;
  for (const rest of ["", `${GOOD}\n`.repeat(200_000)]) {
    assert.match(
      await refusal("cutback.csv", open + rest),
      /cutback\.csv:3: a quote \("\) on this line or below it/,
    );
  }
});

Deno.test("what is no number is kept aside with the reason", async () => {
  const cases: [string, RegExp][] = [
    ["NaN", /not a number \(NaN\)/],
    ["-Infinity", /the cell is infinite/],
    ["1e999", /too large/],
    ["0x10", /not a number$/],
    ["1 234.5", /thousands separators/],
    ["−1.5", /typographic minus/],
    ["", /the cell is empty/],
    ["1.5 dB", /not a number$/],
  ];
  for (const [cell, reason] of cases) {
    const kept = await keptAside(GOOD.replace("1.5", cell));
    assert.deepEqual([kept.column, kept.value], ["insertion_loss_db", cell]);
    assert.match(String(kept.reason), reason);
    assert.match(String(kept.wanted), /a loss of 0…300 dB/);
  }
});

Deno.test("impossible values are kept aside: what was found, what would be right", async () => {
  const place = "K07-1,05,g12";
  const poling = "wafer,die,guide,window_start_mm,window_length_mm,domains,duty_mean,duty_sd,merged\n";
  const cases: [string, string, string, string, RegExp, RegExp][] = [
    ["cutback.csv", CUTBACK, `${place},1550,TE,-20,1.5`, "length_mm", /not above 0/, /above 0/],
    [
      "cutback.csv",
      CUTBACK,
      `${place},1550,TE,20,-1.5`,
      "insertion_loss_db",
      /below 0/,
      /positive: what is lost/,
    ],
    ["cutback.csv", CUTBACK, `${place},1.55,TE,20,1.5`, "wavelength_nm", /below 200/, /200…20000 nm/],
    ["cutback.csv", CUTBACK, `${place},21000,TE,20,1.5`, "wavelength_nm", /above 20000/, /200…20000 nm/],
    [
      "cutback.csv",
      CUTBACK,
      `${place},1550,te,20,1.5`,
      "polarisation",
      /not one of those known/,
      /^TE or TM$/,
    ],
    ["poling.csv", poling, `${place},1,5,500,1.2,0.03,0`, "duty_mean", /above 1/, /0…1/],
    ["poling.csv", poling, `${place},1,5,500,0.5,0.03,-1`, "merged", /below 0/, /whole number, 0 or more/],
    ["poling.csv", poling, `${place},1,5,500,0.5,0.03,1.5`, "merged", /not a whole number/, /whole number/],
    [
      "poling.csv",
      poling,
      `${place},18,5,500,0.5,0.03,1`,
      "window_length_mm",
      /ends at 23 mm, outside/,
      /20 mm long/,
    ],
    [
      "fringes.csv",
      "wafer,die,guide,wavelength_nm,polarisation,contrast,facet_state\n",
      `${place},1550,TE,1.01,bare`,
      "contrast",
      /above 1/,
      /0…1/,
    ],
    [
      "facets.csv",
      "coating_run,facet,wavelength_nm,reflectivity\n",
      `C1,in,1550,4`,
      "reflectivity",
      /above 1/,
      /0…1/,
    ],
    [
      "geometry.csv",
      "wafer,die,guide,z_mm,quantity,value\n",
      `${place},21,width_um,7`,
      "z_mm",
      /21 mm, outside the guide/,
      /20 mm long/,
    ],
    [
      "tuning.csv",
      "wafer,die,guide,scan,process,polarisations,temperature_c,wavelength_nm,power_rel\n",
      `${place},a,second-harmonic,TE+TM>TE,-274,1582,1`,
      "temperature_c",
      /below -273\.15/,
      /°C/,
    ],
    [
      "outcomes.csv",
      "wafer,die,guide,request,figure,value\n",
      `${place},r,puritty,1`,
      "figure",
      /not one of those known/,
      /name of a figure/,
    ],
    [
      "cutback.csv",
      CUTBACK.replace("\n", ",measured_at\n"),
      `${GOOD},1 Sept`,
      "measured_at",
      /form/,
      /ISO 8601/,
    ],
  ];
  for (const [name, head, row, column, reason, wanted] of cases) {
    const kept = await keptAside(row, head, name);
    assert.equal(kept.column, column, row);
    assert.match(String(kept.reason), reason, row);
    assert.match(String(kept.wanted), wanted, row);
  }
});

Deno.test("ids are text: 5 is not 05, and the suggestion says so", async () => {
  const cases: [string, string, string, string][] = [
    ["K07-1,5,g12", "die", "5", '"05"'],
    ["K07-1,05,g1", "guide", "g1", '"g01"'],
    ["K07-1,05,G12", "guide", "G12", '"g12"'],
    ["K07-1,K07-1/05,g12", "die", "K07-1/05", '"05"'],
    ["K07-01,05,g12", "wafer", "K07-01", '"K07-1"'],
    ["K07-1,99,g12", "die", "99", "one of its die ids (text): 05, 06"],
  ];
  for (const [cells, column, value, wanted] of cases) {
    const kept = await keptAside(`${cells},1550,TE,20,1.5`);
    assert.deepEqual([kept.column, kept.value, kept.wanted], [column, value, wanted]);
  }
});

Deno.test("an empty guide is the whole die, an empty die too the whole wafer, a guide without a die neither", async () => {
  const at = (cells: string) => `${cells},1550,TE,20,1.5\n`;
  const { rows, quarantine } = await ingestOne(
    "cutback.csv",
    CUTBACK + at("K07-1,05,") + at("K07-1,,") + at("K07-1,,g12"),
  );
  assert.deepEqual(
    rows.map((row) => [row["scope"], row["unit"], row["die_id"], row["guide_id"]]),
    [["die", "K07-1/05", "K07-1/05", null], ["wafer", "K07-1", null, null]],
  );
  assert.match(String(quarantine[0]!["reason"]), /names guide "g12" and no die/);
});

Deno.test("a row with a cell too many or too few is kept aside", async () => {
  for (const [row, n] of [[GOOD.slice(0, -4), 6], [`${GOOD},`, 8]] as const) {
    const kept = await keptAside(row);
    assert.match(String(kept.reason), new RegExp(`^the row has ${n} cells, the headings 7$`));
  }
});

Deno.test("repeats are kept", async () => {
  assert.deepEqual((await ingestOne("cutback.csv", `${CUTBACK}${GOOD}\n${GOOD}\n`)).counts, [2, 2, 0]);
});

Deno.test("unusual but possible readings are used, with one remark per file", async () => {
  const far = GOOD.replace("1550", "300");
  const { result, counts } = await ingestOne("cutback.csv", `${CUTBACK}${GOOD}\n${far}\n${far}\n`);
  assert.deepEqual(counts, [3, 3, 0]);
  assert.deepEqual(result.remarks.filter((r) => r.code === "unusual_wavelength"), [{
    code: "unusual_wavelength",
    file: "readings/cutback.csv",
    line: 3,
    statement: "2 rows at an unusual wavelength (300 nm; usual: 350…5000 nm); used as given",
  }]);
});

Deno.test("overlapping poling windows get a remark, repeated and adjoining ones do not", async () => {
  const head = "wafer,die,guide,window_start_mm,window_length_mm,domains,duty_mean,duty_sd,merged\n";
  const window = (from: number, length: number) => `K07-1,05,g12,${from},${length},500,0.5,0.03,1\n`;
  const remarks = async (text: string) =>
    (await ingestOne("poling.csv", head + text)).result.remarks.filter((r) =>
      r.code === "overlapping_windows"
    );
  assert.deepEqual(await remarks(window(1, 5) + window(6, 5) + window(1, 5)), []);
  const [remark] = await remarks(window(4, 5) + window(1, 5));
  assert.equal(
    remark!.statement,
    "poling windows of K07-1/05/g12 overlap: 1…6 mm (line 3) and 4…9 mm (line 2); both are used",
  );
});

Deno.test("names and ids that would leave the folder are refused", async () => {
  await using scene = await Scene.make({
    "lot.json": { lot: "../K07", platform: "p", wafers: [{ wafer: "K07-1" }] },
  });
  await assert.rejects(scene.ingest(), {
    name: "InputError",
    message: /lot: .*letters, digits.*found "\.\.\/K07"/,
  });
  await scene.write({
    "lot.json": { lot: "K07", platform: "p", wafers: [{ wafer: "K07-1" }] },
    "guides.csv": GUIDES + "K07-1,../05,1,2,g1,A,7,9.1,20,1,18\n",
  });
  assert.equal((await scene.ingest()).quarantined, 1);
});
