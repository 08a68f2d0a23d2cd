// Takes run folders into the ledger: fabrication records and readings, checked row by row.
export { ingestFolder, type IngestOptions, type IngestResult } from "./ingest_folder.ts";
export { ingestJson } from "./result_json.ts";
export { coverageText } from "./coverage_text.ts";
export type { Coverage, CoverageCell, CoverageRow } from "./coverage.ts";
export type { FileCounts } from "./file_run.ts";
export { type Remark, remarkText } from "./issues.ts";
export { TABLE_SCHEMAS } from "../ingest_tables.ts";
export { jsonSchemas } from "./json_schemas.ts";
