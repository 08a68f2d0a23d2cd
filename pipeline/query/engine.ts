import { DataType, type RecordBatch, type Schema, Table, tableFromIPC, tableToIPC } from "apache-arrow";
import { startDuckDb } from "./duckdb_instance.ts";
import { plainValue, type Value } from "./values.ts";

export interface ResultColumn {
  readonly name: string;
  readonly type: string;
}
/** Rows are arrays in the order of the columns, whose names need not differ. */
export interface QueryResult {
  readonly columns: readonly ResultColumn[];
  readonly rows: readonly (readonly Value[])[];
}

/** An SQL engine in memory. */
export interface Engine extends Disposable {
  /** Makes a table (`name`, or `schema.name`) with the columns of `schema`, without rows. */
  createTable(name: TableName, schema: Schema): void;
  /** Adds rows to a table made before, column by position. */
  insert(name: TableName, batches: Iterable<RecordBatch>): void;
  /** Makes a table of an Arrow table or of Arrow IPC stream bytes. */
  loadTable(name: TableName, data: Table | Uint8Array): void;
  /** Runs any statement for its effect. */
  run(sql: string): void;
  /** Runs one statement and gives its rows. Two statements in one text are an error. */
  query(sql: string): QueryResult;
}
export interface TableName {
  readonly schema?: string;
  readonly table: string;
}

/** `"name"` as SQL takes it, whatever is in the name. */
export const quoteName = (name: string): string => `"${name.replaceAll('"', '""')}"`;
const fullName = ({ schema = "main", table }: TableName) => `${quoteName(schema)}.${quoteName(table)}`;

/** Starts the engine (about 0.7 s). A query sees the tables that were loaded, and nothing of the machine. */
export async function startEngine(): Promise<Engine> {
  const bindings = await startDuckDb();
  // No casts: integers, decimals and time stamps arrive as they are and are made plain in one place.
  bindings.open({
    query: { castBigIntToDouble: false, castDecimalToDouble: false, castTimestampToDate: false },
  });
  const connection = bindings.connect();
  const run = (sql: string) => connection.useUnsafe((raw, id) => raw.runQuery(id, sql));
  // Functions of downloadable extensions then fail with a sentence rather than by waiting for a network.
  run("SET autoinstall_known_extensions = false");
  run("SET autoload_known_extensions = false");
  run("SET enable_external_access = false");
  run("SET lock_configuration = true");
  const engine: Engine = {
    createTable(name, schema) {
      const columns = schema.fields.map((field) => `${quoteName(field.name)} ${sqlType(field.type)}`);
      run(`CREATE TABLE ${fullName(name)} (${columns.join(", ")})`);
    },
    insert({ schema = "main", table }, batches) {
      for (const batch of batches) {
        if (batch.numRows === 0) continue;
        connection.insertArrowFromIPCStream(tableToIPC(new Table([batch]), "stream"), {
          name: table,
          schema,
          create: false,
        });
      }
    },
    loadTable(name, data) {
      const table = data instanceof Table ? data : tableFromIPC(data);
      engine.createTable(name, table.schema);
      engine.insert(name, table.batches);
    },
    run,
    query(sql) {
      return connection.useUnsafe((raw, id) => {
        const statement = raw.createPrepared(id, sql);
        try {
          return resultOf(tableFromIPC(raw.runPrepared(id, statement, [])));
        } finally {
          raw.closePrepared(id, statement);
        }
      });
    },
    [Symbol.dispose]: () => connection.close(),
  };
  return engine;
}

function resultOf(table: Table): QueryResult {
  const fields = table.schema.fields;
  const columns = fields.map((field, i) => {
    const cells = table.getChildAt(i)!;
    return Array.from(cells, (cell) => plainValue(field.type, cell));
  });
  return {
    columns: fields.map((field) => ({ name: field.name, type: String(field.type) })),
    rows: Array.from({ length: table.numRows }, (_, row) => columns.map((column) => column[row]!)),
  };
}

/** SQL type of an Arrow column. @throws RangeError for a type that no table of the ledger uses */
function sqlType(type: DataType): string {
  if (DataType.isDictionary(type)) return sqlType(type.dictionary);
  if (DataType.isList(type)) return `${sqlType(type.valueType)}[]`;
  const known = SQL_TYPES[String(type)];
  if (known === undefined) throw new RangeError(`Cannot load a column of type ${type}`);
  return known;
}

const SQL_TYPES: Readonly<Record<string, string>> = {
  Utf8: "VARCHAR",
  LargeUtf8: "VARCHAR",
  Bool: "BOOLEAN",
  Float32: "FLOAT",
  Float64: "DOUBLE",
  Int8: "TINYINT",
  Int16: "SMALLINT",
  Int32: "INTEGER",
  Int64: "BIGINT",
  Uint8: "UTINYINT",
  Uint16: "USMALLINT",
  Uint32: "UINTEGER",
  Uint64: "UBIGINT",
};
