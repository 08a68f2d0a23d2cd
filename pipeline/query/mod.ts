// SQL over the ledger, and the check of its hashes.
export { checkLedger, type CheckResult, type Finding } from "./check.ts";
export { type Engine, type QueryResult, type ResultColumn, startEngine, type TableName } from "./engine.ts";
export type { LoadOptions } from "./ledger_tables.ts";
export { engineWith, runSql, tableNames } from "./sql.ts";
export type { Value } from "./values.ts";
