import { fileURLToPath } from "node:url";
import { namesIn } from "../ledger/disk.ts";

const FOLDER = new URL("./views/", import.meta.url);

/**
 * Views by name, from the .sql files in `views/`: one SELECT each, over tables of the schema `ledger` and other views.
 * A table without a file of its name is shown as it is.
 */
export async function readViews(): Promise<Map<string, string>> {
  const views = new Map<string, string>();
  for (const file of await namesIn(fileURLToPath(FOLDER))) {
    if (file.endsWith(".sql")) views.set(file.slice(0, -4), await Deno.readTextFile(new URL(file, FOLDER)));
  }
  return views;
}
