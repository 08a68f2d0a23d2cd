import { formatRows, progressBar } from "../console/mod.ts";
import { openLedger } from "../ledger/mod.ts";
import { checkLedger, type CheckResult } from "../query/check.ts";
import { type CommonOptions, note, print, printJson } from "./common.ts";

/** Exit 3 when something in the ledger is not as it was written. */
export async function checkCommand(options: CommonOptions): Promise<0 | 3> {
  await using ledger = await openLedger(options.ledger, { write: false });
  let result: CheckResult;
  {
    using bar = progressBar("checking");
    result = await checkLedger(ledger, (done, of) => bar.update(done, of));
  }
  const { findings, runs, originals, tables } = result;
  const damaged = findings.some((f) => f.severity === "damage");
  if (options.format === "json") printJson(result);
  else if (findings.length > 0) {
    const columns = ["severity", "path", "statement"].map((title) => ({ title }));
    print(formatRows(options.format, columns, findings.map((f) => [f.severity, f.path, f.statement])));
  }
  note(
    `${runs} runs, ${tables} tables and ${originals} originals read: ${
      damaged ? "damaged" : "all hashes hold"
    }`,
  );
  return damaged ? 3 : 0;
}
