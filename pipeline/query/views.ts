import { fileURLToPath } from "node:url";
import { namesIn } from "../ledger/disk.ts";
import { sqlTokens, type Token } from "./sql_text.ts";

const FOLDER = new URL("./views/", import.meta.url);

/**
 * Views by name, from the .sql files in `views/`: one SELECT each, over tables of the schema `ledger` and other views.
 * A table without a file of its name is shown as it is. A view of a table that is not among `tables` is left out: nothing
 * was computed yet that it could show.
 */
export async function readViews(tables: ReadonlySet<string>): Promise<Map<string, string>> {
  const views = new Map<string, string>();
  for (const file of await namesIn(fileURLToPath(FOLDER))) {
    if (file.endsWith(".sql")) views.set(file.slice(0, -4), await Deno.readTextFile(new URL(file, FOLDER)));
  }
  const missing = [...views].filter(([, sql]) =>
    tablesOfView(sqlTokens(sql)).some((name) => !tables.has(name))
  );
  for (const [name] of missing) views.delete(name);
  return views;
}

/** The names that follow `ledger.` in a view. */
function tablesOfView(tokens: readonly Token[]): string[] {
  return tokens.flatMap((token, i) =>
    token.text === "." && tokens[i - 1]?.text === "ledger" ? [tokens[i + 1]!.text] : []
  );
}
