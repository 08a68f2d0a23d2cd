import type { Lot } from "../../shared/schemas/lot.ts";
import type { Held } from "./held.ts";
import type { Remarks } from "./issues.ts";
import { LOT_FILE } from "./run_folder.ts";

/** What is to be said about a folder as a whole: files that are gone, twice there, or spoken of and not there. */
export function folderRemarks(
  lot: Lot,
  sources: readonly { readonly name: string; readonly sha256: string }[],
  held: Held,
  remarks: Remarks,
): void {
  const here = new Map(sources.map((source) => [source.name, source]));
  const inForce = new Map([...held.files.values(), ...sources].map((file) => [file.name, file.sha256]));
  for (const file of held.files.values()) {
    if (here.has(file.name)) continue;
    remarks.add(
      "file_gone",
      file.name,
      "the file is not in the folder any more; its readings stay in force (to withdraw them, put back a file of that name with headings only)",
    );
  }
  const first = new Map<string, string>();
  for (const [name, hash] of [...inForce].sort(([a], [b]) => a < b ? -1 : 1)) {
    const other = first.get(hash);
    if (other === undefined) first.set(hash, name);
    else {
      remarks.add(
        "same_content",
        name,
        `the file has the same content as ${other}: every reading in it counts twice`,
      );
    }
  }
  const files = [...inForce.keys()].map((name) => name.slice(name.lastIndexOf("/") + 1));
  const stems = files.map((file) => file.replace(/\.[^.]*$/, ""));
  const kinds = new Set([...held.files.values()].map((file) => file.kind));
  for (const section of ["columns", "reading_style"] as const) {
    for (const key of Object.keys(lot[section])) {
      const used = files.includes(key) || stems.includes(key) || kinds.has(key) ||
        stems.some((stem) => stem.split("-", 1)[0] === key);
      if (!used) {
        remarks.add(
          "style_without_file",
          LOT_FILE,
          `"${section}" speaks of "${key}", and there is no such file`,
        );
      }
    }
  }
}
