import assert from "node:assert/strict";
import { join } from "node:path";
import { ingestFolder, ingestJson } from "../../../pipeline/ingest/mod.ts";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { CUTBACK, GUIDES, LOT, Scene } from "./folder.ts";

const ONE = CUTBACK + "K07-1,05,g12,1550,TE,20,1.5\n";

Deno.test("a folder becomes one run with its originals, byte for byte", async () => {
  const text = "\ufeff" + ONE.replaceAll("\n", "\r\n");
  await using scene = await Scene.make({ "readings/cutback.csv": text });
  const result = await scene.ingest();
  const [file] = result.files.filter((f) => f.kind === "cutback");
  const ledger = await scene.ledger();
  assert.deepEqual(
    await Deno.readFile(ledger.originalPath(file!.sha256)),
    await Deno.readFile(join(scene.folder, "readings/cutback.csv")),
  );
  const [row] = await scene.rows(result.run, "cutback");
  assert.deepEqual(row, {
    lot: "K07",
    file_name: "readings/cutback.csv",
    source_file: file!.sha256,
    source_line: 2,
    scope: "guide",
    unit: "K07-1/05/g12",
    wafer: "K07-1",
    die: "05",
    guide: "g12",
    die_id: "K07-1/05",
    guide_id: "K07-1/05/g12",
    wavelength_nm: 1550,
    polarisation: "TE",
    length_mm: 20,
    insertion_loss_db: 1.5,
    u_insertion_loss_db: null,
    measured_at: null,
    instrument: null,
  });
  assert.equal((await scene.rows(result.run, "guides")).length, 6);
  assert.equal((await scene.rows(result.run, "lots"))[0]!["platform"], "bulk-ktp");
});

Deno.test("the JSON of a result has the documented fields and adds up", async () => {
  await using scene = await Scene.make({ "readings/cutback.csv": ONE + "K07-1,5,g12,1550,TE,20,1.5\n" });
  const json = ingestJson(await scene.ingest());
  assert.deepEqual(Object.keys(json), [
    "run",
    "lot",
    "files",
    "rows",
    "accepted",
    "quarantined",
    "already_held",
  ]);
  assert.deepEqual([json["rows"], json["accepted"], json["quarantined"]], [8, 7, 1]);
  assert.deepEqual(
    (json["files"] as { name: string }[]).map((f) => [f.name, Object.keys(f)]),
    ["guides.csv", "readings/cutback.csv"].map((
      name,
    ) => [name, ["name", "kind", "sha256", "rows", "accepted", "quarantined"]]),
  );
});

Deno.test("the same folder twice adds nothing and says what is held", async () => {
  await using scene = await Scene.make({ "readings/cutback.csv": ONE });
  const first = await scene.ingest();
  const second = await scene.ingest();
  assert.deepEqual([first.already_held, second.already_held], [false, true]);
  assert.equal((await (await scene.ledger()).runs()).length, 1);
  assert.equal(second.run, first.run);
  assert.deepEqual(ingestJson(second), { ...ingestJson(first), already_held: true });
  assert.deepEqual(second.coverage, first.coverage);
});

Deno.test("a changed file makes a run of its own that supersedes its rows; both runs stay", async () => {
  await using scene = await Scene.make({ "readings/cutback.csv": ONE, "readings/cutback-2.csv": ONE + "\n" });
  const first = await scene.ingest();
  await scene.write({ "readings/cutback.csv": ONE.replace("1.5", "1.7") });
  const second = await scene.ingest();
  assert.deepEqual(second.files.map((f) => f.name), ["readings/cutback.csv"]);
  const manifest = (await (await scene.ledger()).runs()).at(-1)!;
  assert.deepEqual(manifest.parents, [first.run]);
  assert.equal(manifest.tables["guides"], undefined);
  assert.deepEqual(
    (await scene.active("cutback")).map((row) => [row["file_name"], row["insertion_loss_db"]]),
    [["readings/cutback-2.csv", 1.5], ["readings/cutback.csv", 1.7]],
  );
  assert.equal((await scene.rows(first.run, "cutback")).length, 2);
  assert.equal(second.coverage.totals.cutback.guides, 1);
});

Deno.test("a changed lot.json has every file read again", async () => {
  await using scene = await Scene.make({ "readings/cutback.csv": ONE });
  await scene.ingest();
  await scene.write({
    "lot.json": { ...LOT, columns: { cutback: { length_mm: { to: "length_mm", times: 0.5 } } } },
  });
  const second = await scene.ingest();
  assert.deepEqual(second.files.map((f) => f.name), ["guides.csv", "readings/cutback.csv"]);
  assert.deepEqual((await scene.active("cutback")).map((row) => row["length_mm"]), [10]);
});

Deno.test("a file that is gone stays in force, with a remark", async () => {
  await using scene = await Scene.make({ "readings/cutback.csv": ONE });
  await scene.ingest();
  await scene.write({ "readings/cutback.csv": null });
  const second = await scene.ingest();
  assert.equal(second.already_held, true);
  assert.deepEqual(second.remarks.filter((r) => r.code === "file_gone").map((r) => r.file), [
    "readings/cutback.csv",
  ]);
  assert.equal((await scene.active("cutback")).length, 1);
  await scene.write({ "readings/cutback.csv": CUTBACK });
  await scene.ingest();
  assert.equal((await scene.active("cutback")).length, 0);
});

Deno.test("a file under two names counts twice, and that is said", async () => {
  await using scene = await Scene.make({ "readings/cutback.csv": ONE, "readings/cutback-2.csv": ONE });
  const { remarks, accepted } = await scene.ingest();
  assert.equal(accepted, 8);
  assert.match(
    remarks.find((r) => r.code === "same_content")!.statement,
    /same content as readings\/cutback-2\.csv/,
  );
});

Deno.test("an error in any file leaves the ledger as it was", async () => {
  await using scene = await Scene.make({ "readings/cutback.csv": ONE, "readings/fringes.csv": "" });
  await assert.rejects(scene.ingest(), {
    name: "InputError",
    message: /fringes\.csv: it has no line of headings/,
  });
  const ledger = await scene.ledger();
  assert.deepEqual(await ledger.runs(), []);
  const left: string[] = [];
  for await (const entry of Deno.readDir(join(ledger.directory, "originals"))) left.push(entry.name);
  for await (const entry of Deno.readDir(join(ledger.directory, "runs"))) left.push(entry.name);
  assert.deepEqual(left, []);
});

Deno.test("a folder without lot.json, guides.csv, or at all, is refused", async () => {
  await using scene = await Scene.make({ "lot.json": null, "lots.json": "{}" });
  await assert.rejects(scene.ingest(), {
    name: "InputError",
    message: /it has no lot\.json \(did you mean "lots\.json"\?\)/,
  });
  await scene.write({ "lot.json": LOT, "guides.csv": null });
  await assert.rejects(scene.ingest(), { name: "InputError", message: /it has no guides\.csv/ });
  await assert.rejects(ingestFolder(join(scene.root, "none"), await scene.ledger()), {
    name: "InputError",
    message: /there is no such folder/,
  });
});

Deno.test("a reading file that names no kind is refused with the nearest kind", async () => {
  await using scene = await Scene.make({ "readings/cutbak-2.csv": ONE });
  await assert.rejects(scene.ingest(), {
    message: /cutbak-2\.csv: its name begins with no kind of reading \(did you mean "cutback"\?\)/,
  });
  await scene.write({ "readings/cutbak-2.csv": null, "readings/tuning.parquet": "x" });
  await assert.rejects(scene.ingest(), { message: /tuning\.parquet: Parquet is for walls only/ });
});

Deno.test("other files in readings/ are left alone, with a remark", async () => {
  await using scene = await Scene.make({
    "readings/notes.txt": "x",
    "readings/.cutback.csv": "x",
    "extra.csv": "x",
  });
  const { remarks } = await scene.ingest();
  assert.deepEqual(
    remarks.filter((r) => r.code === "ignored_file").map((r) => r.file).sort(),
    ["extra.csv", "readings/.cutback.csv", "readings/notes.txt"],
  );
});

Deno.test("dies of lot.json that guides.csv does not have are refused with the nearest", async () => {
  await using scene = await Scene.make({
    "lot.json": { ...LOT, coatings: [{ coating_run: "C1", facet: "in", dies: ["K07-1/05", "K07-1/6"] }] },
  });
  await assert.rejects(scene.ingest(), {
    name: "InputError",
    message: /coatings\[0\]\.dies\[1\]: guides\.csv has no die "K07-1\/6" \(did you mean "K07-1\/06"\?\)/,
  });
});

Deno.test("a wafer of another lot is refused", async () => {
  await using scene = await Scene.make();
  await scene.ingest();
  await scene.write({ "lot.json": { ...LOT, lot: "K08" } });
  await assert.rejects(scene.ingest(), {
    name: "InputError",
    message: /its wafer "K07-1" is in the ledger already, as a wafer of lot K07/,
  });
});

Deno.test("a repeated guide is kept aside, and the first row counts", async () => {
  await using scene = await Scene.make({ "guides.csv": GUIDES + "K07-1,06,1,2,g12,A,8,9.1,20,1,18\n" });
  const result = await scene.ingest();
  assert.deepEqual([result.rows, result.accepted, result.quarantined], [7, 6, 1]);
  const [row] = await scene.rows(result.run, "quarantine");
  assert.deepEqual([row!["source_line"], row!["column"], row!["value"]], [8, "guide", "g12"]);
  assert.match(String(row!["reason"]), /K07-1\/06\/g12 is listed before/);
  const widths = (await scene.rows(result.run, "guides")).map((r) => r["width_um"]);
  assert.deepEqual(new Set(widths), new Set([7]));
});

Deno.test("coating runs without a spectrum, and spectra of unknown runs, get a remark", async () => {
  await using scene = await Scene.make({
    "lot.json": {
      ...LOT,
      coatings: [
        { coating_run: "C118", facet: "in", dies: ["K07-1/05"] },
        { coating_run: "C119", facet: "out", dies: ["K07-1/05"] },
      ],
    },
    "readings/facets.csv":
      "coating_run,facet,wavelength_nm,reflectivity\nC118,in,1550,0.01\nD7,in,1550,0.01\n",
  });
  const codes = (list: readonly { code: string; statement: string }[]) =>
    list.map((r) => [r.code, /C118|C119|D7/.exec(r.statement)?.[0]]);
  const want = [["coating_without_spectrum", "C119"], ["unknown_coating_run", "D7"]];
  assert.deepEqual(codes((await scene.ingest()).remarks), want);
  assert.deepEqual(codes((await scene.ingest()).remarks), want); // also when the file is not read again
  assert.equal((await scene.active("facets")).length, 2);
});

Deno.test("the run stays away from a ledger that is open for reading only", async () => {
  await using scene = await Scene.make();
  await scene.ingest();
  await scene.write({ "readings/cutback.csv": ONE });
  await using reader = await openLedger((await scene.ledger()).directory, { write: false });
  await assert.rejects(ingestFolder(scene.folder, reader));
  assert.equal((await reader.runs()).length, 1);
});
