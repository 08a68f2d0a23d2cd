import { formatRows } from "../console/mod.ts";
import { openLedger } from "../ledger/mod.ts";
import { runSql } from "../query/sql.ts";
import { type CommonOptions, print } from "./common.ts";

export async function sqlCommand(query: string, options: CommonOptions): Promise<0> {
  await using ledger = await openLedger(options.ledger, { write: false });
  const { columns, rows } = await runSql(ledger, query);
  print(formatRows(options.format, columns.map((c) => ({ title: c.name })), rows));
  return 0;
}
