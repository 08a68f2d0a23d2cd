import { deepEqual, equal, match, notEqual, ok, rejects, throws } from "node:assert/strict";
import { join } from "node:path";
import { processRemarks } from "../../models/decision/mod.ts";
import { buildModel, loadPlatform, platformIds } from "../../pipeline/platforms.ts";
import { InputError } from "../../shared/errors.ts";
import type { SolverIndex } from "../../shared/schemas/platform.ts";
import { designsFor } from "../../pipeline/designs/mod.ts";
import { withFolder } from "./ledger/a_ledger.ts";

const COARSE = { cells: { x: 16, y: 16 }, wavelengthNodes: 4 };
const BUILT_IN = ["bulk-ktp", "bulk-ln", "rb-ktp-zcut", "tfln-xcut", "ti-ln-zcut"];
const KTP = {
  platform: "mine",
  material: "KTP",
  axes: { TE: "y", TM: "z" },
  index: { from: "bulk" },
  effective_area_um2: 40,
  nonlinear: { "TE>TE+TM": { d_pm_per_v: 3.92, at_nm: 1064 } },
};
const refusal = (says: RegExp) => (error: unknown) => {
  ok(error instanceof InputError, String(error));
  equal(error.exitCode, 2);
  match(error.message, says);
  return true;
};
const write = (folder: string, name: string, content: unknown) =>
  Deno.writeTextFile(join(folder, name), typeof content === "string" ? content : JSON.stringify(content));

Deno.test("every built-in platform loads and makes a model", async () => {
  deepEqual(await platformIds(), BUILT_IN);
  for (const id of BUILT_IN) {
    const loaded = await loadPlatform(id);
    const { designs } = await designsFor(null, loaded, [4], [], { grid: COARSE });
    const model = buildModel({ ...loaded, designs });
    equal(model.id, id);
    equal(model.expansion(25), 1);
    match(loaded.fingerprint, /^[0-9a-f]{64}$/);
  }
});

Deno.test("a user's folder adds platforms and goes before those built in; every byte is in the fingerprint", () =>
  withFolder(async (folder) => {
    await write(folder, "mine.json", KTP);
    await write(folder, "bulk-ktp.json", { ...KTP, platform: "bulk-ktp" });
    deepEqual(await platformIds(folder), [...BUILT_IN, "mine"].sort());
    const [mine, theirs, own] = [
      await loadPlatform("mine", folder),
      await loadPlatform("bulk-ktp"),
      await loadPlatform("bulk-ktp", folder),
    ];
    equal(own.file, join(folder, "bulk-ktp.json"));
    equal(new Set([mine.fingerprint, theirs.fingerprint, own.fingerprint]).size, 3);
    equal((await loadPlatform("bulk-ln", folder)).platform.material, "CLN");
    await write(folder, "mine.json", `${JSON.stringify(KTP)}\n`);
    notEqual((await loadPlatform("mine", folder)).fingerprint, mine.fingerprint);
  }));

Deno.test("an unknown platform is refused with those that are known; a folder that is not there is named", () =>
  withFolder(async (folder) => {
    await write(folder, "mine.json", KTP);
    await rejects(
      loadPlatform("nine", folder),
      refusal(/Unknown platform "nine": known are bulk-ktp, bulk-ln, mine, /),
    );
    await rejects(loadPlatform("mine", join(folder, "no")), refusal(/Cannot read the platform folder .*no/));
  }));

Deno.test("a bad platform file is refused with the field, what was found and what is wanted", () =>
  withFolder(async (folder) => {
    const { effective_area_um2: _, ...noArea } = KTP;
    for (
      const [content, says] of [
        ["{", /mine\.json.*not valid JSON/],
        [{ ...KTP, platform: "other" }, /calls itself "other", its file name says "mine"/],
        [{ ...KTP, material: "BBO" }, /material: .*"KTP".*\(found "BBO"\)/],
        [{ ...KTP, colour: 1 }, /colour/],
        [{ ...KTP, nonlinear: { "TE>TE": { d_pm_per_v: 1, at_nm: 1064 } } }, /pump>signal\+idler/],
        [{ ...KTP, nonlinear: { "TE>TE+TM": { d_pm_per_v: 0, at_nm: 1064 } } }, /coefficient other than 0/],
        [{ ...KTP, defaults: { loss_db_cm: { value: 0.5, u: -1 } } }, /defaults\.loss_db_cm.*u/],
        [noArea, /no effective area; give effective_area_um2/],
        [
          { ...KTP, index: { from: "table", n_eff: "n.csv" } },
          /platform table .*n\.csv: there is no such file/,
        ],
      ] as const
    ) {
      await write(folder, "mine.json", content);
      await rejects(loadPlatform("mine", folder), refusal(says));
    }
    await write(folder, "mine.json", { ...KTP, axes: { TE: "o", TM: "z" } });
    const loaded = await loadPlatform("mine", folder);
    throws(() => buildModel(loaded), refusal(/Cannot use platform .*mine\.json: /));
  }));

Deno.test("a bad row of a platform's table is refused with its line", () =>
  withFolder(async (folder) => {
    await write(folder, "mine.json", { ...KTP, index: { from: "table", n_eff: "n.csv" } });
    const head = "wavelength_nm,polarisation,temperature_c,width_um,n_eff\n";
    for (
      const [text, says] of [
        [`${head}1550,TE,25,4,1.75\n1550,TX,25,4,1.75\n`, /n\.csv:3: polarisation: /],
        [`${head}1550,TE,25,4,oops\n`, /n\.csv:2: n_eff: /],
        [`${head}1550,TE,25,4\n`, /n\.csv/],
        [`${head.replace("n_eff", "n")}1550,TE,25,4,1.7\n`, /n\.csv:2: .*n_eff/],
      ] as const
    ) {
      await write(folder, "n.csv", text);
      await rejects(loadPlatform("mine", folder), refusal(says));
    }
    // Rows that are right one by one but make no table: said when the model is built.
    const [a, b, c] = ["1550,TE,25,4,1.75\n", "1600,TE,25,4,1.74\n", "1550,TE,50,4,1.76\n"];
    await write(folder, "n.csv", `${head}${a}${b}${c}`);
    const loaded = await loadPlatform("mine", folder);
    throws(() => buildModel(loaded), refusal(/Cannot use platform/));
  }));

Deno.test("a diffusion given by time and temperature says of every answer that it is an estimate", () =>
  withFolder(async (folder) => {
    const built = JSON.parse(await Deno.readTextFile("models/platforms/ti-ln-zcut.json"));
    const { diffusion_lateral_um: _x, diffusion_depth_um: _y, ...index } = built.index;
    await write(folder, "mine.json", {
      ...built,
      platform: "mine",
      index: { ...index, diffusion: { hours: 8.5, temperature_c: 1120 } },
    });
    const loaded = await loadPlatform("mine", folder);
    const { designs } = await designsFor(null, loaded, [7], [], { grid: COARSE });
    const remark = buildModel({ ...loaded, designs }).index.remark("TM", 1550e-9, 50, { width_um: 7 })!;
    match(remark, /^estimated_diffusion: lengths of \d\.\d\d µm from 8\.5 h at 1120 °C/);
    match(remark, /beyond_published_range: diffusion at 1120 °C/);
    // Neither of the two, and half of the lengths, are refused; lengths with time and temperature are no estimate.
    const { diffusion, ...bare } = index;
    for (const half of [{}, { diffusion_depth_um: 4, diffusion }]) {
      await write(folder, "mine.json", { ...built, platform: "mine", index: { ...bare, ...half } });
      await rejects(loadPlatform("mine", folder), refusal(/or diffusion in their place/));
    }
    equal(built.index.diffusion_depth_um, 4.5);
    deepEqual(processRemarks((await loadPlatform("ti-ln-zcut")).platform.index as SolverIndex), []);
  }));

Deno.test("a platform whose modes are solved takes no constant area, and a film table is held against its substrate", () =>
  withFolder(async (folder) => {
    const built = JSON.parse(await Deno.readTextFile("models/platforms/rb-ktp-zcut.json"));
    await write(folder, "mine.json", { ...built, platform: "mine", effective_area_um2: 40 });
    await rejects(loadPlatform("mine", folder), refusal(/effective_area_um2 40 beside index\.from "solver"/));
    const table = { from: "table", n_eff: "n.csv", substrate: "silica" };
    await write(folder, "mine.json", { ...KTP, index: table });
    await write(
      folder,
      "n.csv",
      "wavelength_nm,polarisation,temperature_c,width_um,n_eff\n1550,TE,25,4,1.70\n1550,TE,25,5,1.75\n",
    );
    // KTP's n_y at 1550 nm is 1.734 (König & Wong 2004).
    await rejects(
      loadPlatform("mine", folder),
      refusal(/found n_eff 1\.75 at .* width_um 5; .* the film's 1\.73/),
    );
  }));
