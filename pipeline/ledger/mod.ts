// The append-only store of everything that was taken in and computed.
export * from "./types.ts";
export { openLedger, type OpenOptions } from "./ledger.ts";
export type { CommitStage } from "./pending_run.ts";
export { activeFilesOf, filterActive, requestOf, rowFilterOf, runsInForceOf } from "./active.ts";
export {
  type Columns,
  columnsToBatches,
  type ColumnType,
  numbersOf,
  tableSchema,
  type TableShape,
  tableStream,
  textsOf,
} from "./columns.ts";
