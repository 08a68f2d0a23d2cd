import type { Ledger, Manifest } from "../ledger/mod.ts";
import { MODEL_VERSION } from "../model_version.ts";
import type { LoadedPlatform } from "../platforms.ts";
import { pooledRuns } from "../traits/pooled_lots.ts";
import type { PredictParameters } from "./trace_find.ts";

/** What has changed since the prediction, in sentences. */
export async function staleness(
  now: Ledger,
  past: Ledger,
  run: Manifest,
  [reduced, ...others]: readonly [Manifest, ...Manifest[]],
  parameters: PredictParameters,
  loaded: LoadedPlatform,
  requestFingerprint: string | undefined,
): Promise<string[]> {
  const lot = run.lot!;
  const remarks: string[] = [];
  const before = new Map((await past.activeFiles(lot)).map((f) => [f.name, `${f.sha256} ${f.run}`]));
  const changed = (await now.activeFiles(lot)).filter((f) => before.get(f.name) !== `${f.sha256} ${f.run}`);
  const inForce = (await now.runsInForce("reduce")).find((r) => r.lot === lot);
  if (changed.length > 0) {
    const names = changed.slice(0, 3).map((f) => f.name).join(", ");
    const more = changed.length > 3 ? ` and ${changed.length - 3} more` : "";
    remarks.push(
      `the prediction is out of date: ${names}${more} taken in since; the trace shows what ${run.run} used; ` +
        `run predict ${lot}`,
    );
  } else if (inForce !== undefined && inForce.run !== reduced.run) {
    remarks.push(
      `the prediction is out of date: the readings were reduced anew by ${inForce.run}; run predict ${lot}`,
    );
  }
  const known = new Map(others.map((r) => [r.lot, r.fingerprint]));
  const pooled = (await pooledRuns(now, loaded)).filter((r) => r.lot !== lot);
  const changedLots = [
    ...pooled.filter((r) => known.get(r.lot) !== r.fingerprint).map((r) => r.lot!),
    ...others.filter((o) => !pooled.some((r) => r.lot === o.lot)).map((o) => o.lot!),
  ];
  if (remarks.length === 0 && changedLots.length > 0 && loaded.fingerprint === parameters.platform_sha256) {
    remarks.push(
      `the prediction is out of date: readings of ${changedLots.slice(0, 3).join(", ")} that it is pooled ` +
        `with have changed since; run predict ${lot}`,
    );
  }
  if (loaded.fingerprint !== parameters.platform_sha256) {
    remarks.push(
      `platform ${parameters.platform} is not the one that ${run.run} used (${loaded.file} has another content): ` +
        `values are the stored ones; is --platforms right?`,
    );
  }
  if (run.model !== MODEL_VERSION) {
    remarks.push(`${run.run} was made by model ${run.model}, this program's is ${MODEL_VERSION}`);
  }
  if (requestFingerprint !== undefined && requestFingerprint !== parameters.request_sha256) {
    remarks.push(
      `the file of request ${parameters.request} has changed since ${run.run}; run predict ${lot}`,
    );
  }
  return remarks;
}
