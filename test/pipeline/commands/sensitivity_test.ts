import { deepEqual, equal, match, ok } from "node:assert/strict";
import { join } from "node:path";
import { ingestFolder } from "../../../pipeline/ingest/mod.ts";
import { openLedger } from "../../../pipeline/ledger/mod.ts";
import { runFiles, writeFiles, writeRequests } from "../../run_folder.ts";
import { wavelot } from "../../run_wavelot.ts";
import { assertClose } from "../../assert_close.ts";
import { withFolder } from "../ledger/a_ledger.ts";

const PROCESS = ["--process", "TE>TE+TE", "--wavelength", "1550"];

Deno.test("sensitivities of a platform read well at 80 columns, and as JSON they are plain numbers", () =>
  withFolder(async (folder) => {
    const none = ["--ledger", join(folder, "none")];
    const call = await wavelot(["sensitivity", "tfln-xcut", ...PROCESS, "--width", "1.4", ...none]);
    equal(call.code, 0, call.stderr);
    for (const line of call.stdout.split("\n")) ok(line.length <= 80, line);
    match(call.stdout, /TE>TE\+TE, 775 = 1550 \+ 1550 nm, on platform tfln-xcut/);
    match(call.stdout, /Width 1\.4 µm, period \d\.\d+ µm, 25\.0 °C/);
    for (const name of ["width", "film thickness", "etch depth", "temperature"]) {
      match(call.stdout, new RegExp(`^${name} +\\+[\\d.]+ (µm|nm|°C) `, "m"));
    }
    // 0.1 µm moves a ridge's centre out of reach: a tenth of it is told beside it.
    match(call.stdout, /^width +\+0\.1 µm .* – /m);
    match(call.stdout, /^width +\+0\.01 µm +−\d+ +−\d/m);
    match(call.stdout, /No width from 0\.8 to 2 µm is non-critical/);
    const json = JSON.parse(
      (await wavelot(["sensitivity", "tfln-xcut", ...PROCESS, "--width", "1.4", "--format", "json", ...none]))
        .stdout,
    );
    const [design] = json.designs;
    deepEqual([json.platform, json.lot, json.process, design.matched], ["tfln-xcut", null, "TE>TE+TE", true]);
    const film = design.rows.find((r: { parameter: string }) => r.parameter === "film_thickness_nm");
    // A nanometre of film moves the oven by tens of degrees: what the oven does per degree undoes it.
    const warm = design.rows.find((r: { parameter: string }) => r.parameter === "temperature_c");
    assertClose(film.temperature_c * warm.mismatch_per_m, -film.mismatch_per_m, { rel: 1e-6 });
    ok(Math.abs(film.temperature_c) > 10);
  }));

Deno.test("a process error is told with its efficiency, solved once and kept; several modes are remarked on", () =>
  withFolder(async (folder) => {
    const ledger = join(folder, "ledger");
    await writeFiles(join(folder, "run"), runFiles(() => 0.072));
    {
      await using held = await openLedger(ledger, { write: true });
      await ingestFolder(join(folder, "run"), held);
    }
    const ask = [
      "sensitivity",
      "rb-ktp-zcut",
      "--process",
      "TE>TE+TM",
      "--wavelength",
      "1582",
      "--width",
      "3",
    ];
    const first = await wavelot([...ask, "--ledger", ledger]);
    equal(first.code, 0, first.stderr);
    match(first.stderr, /solving the modes of the slightly changed rb-ktp-zcut's designs \(12 pieces; kept/);
    for (const line of first.stdout.split("\n")) ok(line.length <= 80, line);
    match(first.stdout, /^exchange depth +\+0\.1 µm .* %$/m);
    match(first.stdout, /^exchange depth +−0\.1 µm .* %$/m);
    match(first.stdout, /where ±0\.1 µm leaves −1\d(\.\d)? 1\/m to\s+second order/);
    match(first.stdout, /remark: several_modes: a guide drawn 3 µm wide carries 4 TE modes at 791 nm/);
    match(first.stdout, /remark: beyond_published_range: KTP y at 791 nm/);
    const again = await wavelot([...ask, "--ledger", ledger, "--format", "json"]);
    equal(again.stderr.includes("solving"), false, again.stderr);
    const [design] = JSON.parse(again.stdout).designs;
    for (const row of design.rows) ok(Number.isFinite(row.efficiency_percent), row.parameter);
    equal(design.waves[0].modes, 4);
    ok(design.remarks.length >= 2);
  }));

Deno.test("with a lot, a request is asked about the designs of its guides", () =>
  withFolder(async (folder) => {
    const [run, ledger, requests] = ["run", "ledger", "requests"].map((name) => join(folder, name));
    await writeFiles(run!, runFiles(() => 0.072));
    await writeRequests(requests!);
    {
      await using held = await openLedger(ledger!, { write: true });
      await ingestFolder(run!, held);
    }
    const where = ["--lot", "Z09", "--ledger", ledger!, "--requests", requests!, "--format", "json"];
    const call = await wavelot(["sensitivity", "filtered", ...where]);
    equal(call.code, 0, call.stderr);
    const { lot, request, designs } = JSON.parse(call.stdout);
    deepEqual([lot, request], ["Z09", "filtered"]);
    ok(designs.length >= 1);
    ok(designs[0].matched && designs[0].temperature_c >= 20 && designs[0].temperature_c <= 90);
    ok(designs[0].purity > 0.3 && designs[0].purity < 1);
    deepEqual(designs[0].rows.map((r: { parameter: string }) => r.parameter), ["temperature_c"]);
  }));

Deno.test("what can't be asked is refused with what is wanted", () =>
  withFolder(async (folder) => {
    const none = ["--ledger", join(folder, "none")];
    for (
      const [args, says] of [
        [["tfln-xcut"], /add --process and --wavelength, or ask with a request's name/],
        [["tfln-xcut", ...PROCESS], /add --width, in µm/],
        [["nine", ...PROCESS], /Unknown platform or lot "nine": platforms are bulk-ktp/],
        [["nine"], /Unknown platform or lot "nine": platforms are bulk-ktp/],
        [["heralded-1582"], /Cannot tell what request heralded-1582 is asked about: add --lot/],
        [["bulk-ln", "--process", "TE>TE", "--wavelength", "1550"], /need pump>signal\+idler/],
        [["bulk-ln", "--process", "TE>TE+TE", "--wavelength", "red"], /need the signal's in nm/],
        [["heralded-1582", "--lot", "R1"], /Cannot look up lot R1: there is no ledger/],
        [["bulk-ln", ...PROCESS, "--width", "0"], /need a number above 0/],
      ] as const
    ) {
      const call = await wavelot(["sensitivity", ...args, ...none]);
      equal(call.code, 2, args.join(" "));
      match(call.stderr, says);
      equal(call.stdout, "");
    }
  }));
