import { deepEqual, equal, match, ok } from "node:assert/strict";
import { join } from "node:path";
import type { Ranking } from "../../../pipeline/query/rank.ts";
import type { Trace } from "../../../pipeline/query/trace_types.ts";
import { runFiles, writeFiles, writeRequests } from "../../run_folder.ts";
import { wavelot } from "../../run_wavelot.ts";

/** Facet reflectivity in the readings of contrast; any will do here. */
const FILES = runFiles(() => 0.072);

/** The lot of test/run_folder.ts under another name: whole, or as it was made and before anybody read it. */
function lotFiles(name: string, read: boolean): Record<string, string> {
  const names = Object.keys(FILES).filter((f) => read || !f.startsWith("readings/"));
  return Object.fromEntries(names.map((f) => [f, FILES[f]!.replaceAll("Z09", name)]));
}

const SURVIVAL = {
  request: "survive",
  process: "pair-generation",
  polarisations: { pump: "TE", signal: "TE", idler: "TM" },
  pump: { wavelength_nm: 791, fwhm_ps: 1, average_power_mw: 0.1, repetition_mhz: 76 },
  signal: { wavelength_nm: 1582, fibre_mfd_um: 10.4 },
  idler: { wavelength_nm: 1582 },
  oven_c: [20, 90],
  // 0.5 ± 0.2 dB/cm, the platform's default: as likely met as not.
  require: [{ figure: "loss_db_cm_signal", at_most: 0.5 }],
};

Deno.test("a lot that nobody read keeps the platform's doubt and is held; other lots move its mean, and trace follows", async () => {
  const root = await Deno.makeTempDir({ prefix: "pooled-" });
  try {
    const requests = join(root, "requests");
    await writeRequests(requests, { survive: SURVIVAL });
    const ledger = join(root, "ledger");
    const call = async (...args: string[]) => {
      const made = await wavelot([...args, "--ledger", ledger]);
      ok(made.code <= 1, made.stderr);
      return made;
    };
    const rank = async (lot: string) => {
      const { stdout } = await call(
        ...["rank", "survive", "--lot", lot, "--requests", requests, "--format", "json", "--all-guides"],
      );
      // The guide with another period matches at no temperature: of it the request asks too much in any case.
      return (JSON.parse(stdout) as Ranking).dies.filter((d) => !d.guide.endsWith("g10"));
    };
    const trace = async (guide: string) => {
      const args = ["trace", guide, "--figure", "loss_db_cm_signal", "--format", "json"];
      return JSON.parse((await call(...args)).stdout) as Trace;
    };
    await writeFiles(join(root, "Y08"), lotFiles("Y08", false));
    await call("ingest", join(root, "Y08"));
    for (const { decision, probability, figures } of await rank("Y08")) {
      const { basis, mean, u } = figures.loss_db_cm_signal;
      deepEqual([decision, basis], ["hold", "platform"]);
      ok(probability > 0.3 && probability < 0.7, `${probability}`);
      // 0.5 ± 0.2 cut at no loss at all.
      ok(Math.abs(mean! - 0.5) < 0.02 && u! > 0.17 && u! < 0.2, `${mean} ± ${u}`);
    }
    const alone = await trace("Y08-1/01/g1");
    equal(alone.traits[0]!.shares, null);
    deepEqual(alone.runs.other_lots, []);

    await writeFiles(join(root, "Z09"), lotFiles("Z09", true));
    await call("ingest", join(root, "Z09"));
    const after = await rank("Y08");
    for (const { decision, figures } of after) {
      equal(decision, "hold");
      ok(figures.loss_db_cm_signal.u! > 0.17, `${figures.loss_db_cm_signal.u}`);
    }
    const among = await trace("Y08-1/01/g1");
    equal(among.runs.other_lots.length, 1);
    ok(among.traits[0]!.shares!.other_lots > 0.1, JSON.stringify(among.traits[0]!.shares));
    deepEqual(among.remarks, []);
    // Nothing has changed: nothing is computed.
    match((await call("predict", "Y08", "--requests", requests)).stderr, /nothing was computed/);

    // The other lot reads more: predictions pooled with it are out of date, and say so.
    const more = "wafer,die,guide,wavelength_nm,polarisation,contrast,u_contrast,facet_state\n" +
      "Z09-1,03,g2,1582,TE,0.1,0.00001,bare\n";
    await writeFiles(join(root, "Z09"), { "readings/fringes-2.csv": more });
    await call("ingest", join(root, "Z09"));
    await rank("Z09");
    const stale = await trace("Y08-1/01/g1");
    equal(stale.mean, among.mean);
    match(
      stale.remarks.join("\n"),
      /readings of Z09 that it is pooled with have changed since; run predict Y08/,
    );
    await call("predict", "Y08", "--requests", requests);
    const renewed = await trace("Y08-1/01/g1");
    deepEqual(renewed.remarks, []);
    ok(renewed.mean !== among.mean);
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});
