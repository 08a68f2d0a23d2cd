import { fileURLToPath } from "node:url";
import * as duckdb from "@duckdb/duckdb-wasm/blocking";

/** The part of the bindings that the engine uses. */
export interface Bindings {
  instantiate(): Promise<unknown>;
  open(config: Record<string, unknown>): void;
  connect(): duckdb.DuckDBConnection;
  instantiateWasm: Instantiate;
}
type Receive = (instance: { exports: WebAssembly.Exports }, module: WebAssembly.Module) => void;
type Instantiate = (imports: WebAssembly.Imports, receive: Receive) => WebAssembly.Exports;

/**
 * Starts DuckDB in memory. It gets a runtime without files and network: whatever a query says, it reaches only the
 * tables that were loaded.
 */
export async function startDuckDb(): Promise<Bindings> {
  const wasm = new URL(import.meta.resolve("@duckdb/duckdb-wasm/dist/duckdb-eh.wasm"));
  const bundle = { mainModule: fileURLToPath(wasm), mainWorker: "" };
  const bindings = await duckdb.createDuckDB(
    { mvp: bundle, eh: bundle },
    new duckdb.VoidLogger(),
    duckdb.DEFAULT_RUNTIME,
  ) as unknown as Bindings;
  const failed = Promise.withResolvers<never>();
  bindings.instantiateWasm = (imports, receive) => {
    Object.assign(globalThis, { DUCKDB_RUNTIME: { ...duckdb.DEFAULT_RUNTIME } });
    instantiate(wasm, imports, receive).catch(failed.reject);
    return {};
  };
  await Promise.race([bindings.instantiate(), failed.promise]);
  return bindings;
}

/** A third of the start-up; a second engine of the same process need not repeat it. */
let compiled: Promise<WebAssembly.Module> | null = null;

async function instantiate(wasm: URL, imports: WebAssembly.Imports, receive: Receive): Promise<void> {
  const module = await (compiled ??= Deno.readFile(wasm).then((bytes) => WebAssembly.compile(bytes)));
  const instance = await WebAssembly.instantiate(module, imports);
  receive({ exports: neededExports(module, instance.exports) }, module);
}

/**
 * The module exports every C++ function it holds, 75,011 names, for extensions to link against; there are none here,
 * and the glue's walks over all of them took half the start-up. Kept are the names that are no mangled C++ names (what
 * glue code can call by name) and those that the module itself imports (what it looks up in its own exports).
 */
function neededExports(module: WebAssembly.Module, exports: WebAssembly.Exports): WebAssembly.Exports {
  const imported = new Set(WebAssembly.Module.imports(module).map((entry) => entry.name));
  const needed: WebAssembly.Exports = {};
  for (const name of Object.keys(exports)) {
    const plain = name.startsWith("orig$") ? name.slice(5) : name;
    if (!plain.startsWith("_Z") || imported.has(plain)) needed[name] = exports[name]!;
  }
  return needed;
}
