import type { Schema } from "apache-arrow";
import { TABLE_SCHEMAS } from "../ingest_tables.ts";

/** Names of the tables that always exist for a query. */
export const BASE_TABLES: readonly string[] = Object.keys(TABLE_SCHEMAS);

/**
 * Columns of a table that a ledger may not hold yet (a query about it gets no rows, not an error), or null for a name
 * that is no base table's. Where a run holds the table, its own columns count.
 */
export const baseSchema = (table: string): Schema | null => TABLE_SCHEMAS[table] ?? null;
