import { deepEqual, equal, match, notEqual, ok, rejects } from "node:assert/strict";
import { join } from "node:path";
import { findRequest, loadAllRequests, loadRequestFile, loadRequests } from "../../pipeline/requests.ts";
import { InputError } from "../../shared/errors.ts";
import { withFolder } from "./ledger/a_ledger.ts";
import { REQUESTS, writeFiles, writeRequests } from "../run_folder.ts";

const { open, double } = REQUESTS;
const refusal = (says: RegExp) => (error: unknown) => {
  ok(error instanceof InputError, String(error));
  match(error.message, says);
  return true;
};

Deno.test("requests of a folder come sorted by file, each by its own name; other files are left alone", () =>
  withFolder(async (folder) => {
    await writeRequests(folder, { b: double, a: open });
    await writeFiles(folder, { "notes.txt": "not a request", "deeper/c.json": "{" });
    deepEqual((await loadRequests(folder)).map((r) => r.name), ["open", "double"]);
    deepEqual((await loadAllRequests(folder)).map((r) => r.name), ["open", "double"]);
    equal((await findRequest("double", folder)).file, join(folder, "b.json"));
    equal((await findRequest(join(folder, "b.json"))).name, "double");
    // What is not in the folder may be one of the examples.
    equal((await findRequest("heralded-1582", folder)).name, "heralded-1582");
    await rejects(
      findRequest("nobody", folder),
      refusal(/Unknown request "nobody": known are open, double, .*heralded-1582/),
    );
  }));

Deno.test("two requests of one name, and a folder that is not there, are refused", () =>
  withFolder(async (folder) => {
    await writeRequests(folder, { a: double, b: double });
    await rejects(loadRequests(folder), refusal(/two requests called double: .*a\.json and .*b\.json/));
    for (const asked of [loadRequests, loadAllRequests, (f: string) => findRequest("double", f)]) {
      await rejects(asked(join(folder, "no")), refusal(/Cannot read the request folder .*no/));
    }
  }));

Deno.test("a fingerprint covers the request's file and its pump spectrum", () =>
  withFolder(async (folder) => {
    const { fwhm_ps: _, ...pump } = open.pump;
    const spectral = { ...open, pump: { ...pump, shape: "spectrum", spectrum: "pump.csv" } };
    await writeRequests(folder, { r: spectral });
    const spectrum = "wavelength_nm,intensity\n790,0.2\n792,-0.01\n791,1\n";
    await writeFiles(folder, { "pump.csv": spectrum });
    const path = join(folder, "r.json");
    const first = await loadRequestFile(path);
    ok(first.pulsed);
    // Ascending, in metres, and nothing below the dark.
    deepEqual([...first.spectrum!.intensity], [0.2, 1, 0]);
    deepEqual([...first.spectrum!.lambda].map((l) => Math.round(l * 1e12)), [790000, 791000, 792000]);
    equal((await loadRequestFile(path)).fingerprint, first.fingerprint);
    await writeFiles(folder, { "pump.csv": spectrum.replace("0.2", "0.3") });
    const second = await loadRequestFile(path);
    notEqual(second.fingerprint, first.fingerprint);
    await writeRequests(folder, { r: { ...spectral, oven_c: [20, 91] } });
    notEqual((await loadRequestFile(path)).fingerprint, second.fingerprint);
    for (
      const [text, says] of [
        [
          "wavelength_nm,intensity\n790,1\n791,x\n792,1\n",
          /pump\.csv:3, column "intensity": found "x", need a finite number/,
        ],
        ["nm,intensity\n790,1\n791,1\n792,1\n", /pump\.csv:2, column "wavelength_nm": found ""/],
        ["wavelength_nm,intensity\n790,1\n791,1\n", /at least 3 rows/],
        ["wavelength_nm,intensity\n790,0\n791,0\n792,0\n", /intensity above 0/],
        ["wavelength_nm,intensity\n780,1\n781,1\n782,1\n", /791 nm inside/],
      ] as const
    ) {
      await writeFiles(folder, { "pump.csv": text });
      await rejects(loadRequestFile(path), refusal(says));
    }
    await Deno.remove(join(folder, "pump.csv"));
    await rejects(loadRequestFile(path), refusal(/pump spectrum .*pump\.csv: there is no such file/));
  }));

Deno.test("a request that can't be is refused with the field and the reason, all of them at once", () =>
  withFolder(async (folder) => {
    const { fwhm_ps: _, repetition_mhz: __, ...cw } = open.pump;
    for (
      const [request, says] of [
        [
          { ...open, pump: cw },
          /require\[1\]\.figure: "purity" can't exist: not a figure of a continuous-wave pump/,
        ],
        [
          { ...open, require: [{ figure: "brightness" }, { figure: "purity" }] },
          /require\[0\]\.figure: "brightness".*\n.*require\[1\]: has no limit/s,
        ],
        [
          { ...double, require: [{ figure: "purity", at_least: 0.5 }] },
          /"purity" can't exist: not a figure of second-harmonic/,
        ],
        [{ ...double, order_by: "beauty" }, /order_by: "beauty" is not a figure/],
        [{ ...double, oven_c: [90, 20] }, /oven_c: need \[lowest, highest\]/],
        [{ ...double, signal: { wavelength_nm: "1582" } }, /signal\.wavelength_nm: .*\(found "1582"\)/],
        [{ ...double, oven: 1 }, /oven/],
        ["[]", /request/],
        ['{"request": "x",,}', /not valid JSON/],
      ] as const
    ) {
      await writeFiles(folder, { "r.json": typeof request === "string" ? request : JSON.stringify(request) });
      await rejects(loadRequestFile(join(folder, "r.json")), refusal(says));
    }
    await Deno.writeFile(join(folder, "r.json"), Uint8Array.of(0x7b, 0xff, 0x7d));
    await rejects(loadRequestFile(join(folder, "r.json")), refusal(/it is not UTF-8 text/));
  }));
