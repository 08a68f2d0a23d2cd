/** Text that is HTML already. */
export class Html {
  constructor(readonly text: string) {}
  toString(): string {
    return this.text;
  }
}

const ENTITIES: Readonly<Record<string, string>> = {
  "&": "&amp;",
  "<": "&lt;",
  ">": "&gt;",
  '"': "&quot;",
  "'": "&#39;",
};

// Control and direction marks of an instrument's file could hide or reorder what stands beside them.
const UNSEEN = /(?![\t\n\r])[\p{Cc}\p{Cf}]/gu;

/** Text as it may stand in an element or a quoted attribute. */
export const escapeHtml = (text: string): string =>
  text.replace(UNSEEN, (c) => `\\u${c.codePointAt(0)!.toString(16).padStart(4, "0")}`)
    .replace(/[&<>"']/g, (c) => ENTITIES[c]!);

/** HTML from a template: every hole is escaped unless it is {@link Html}; lists are joined, null and false leave nothing. */
export function html(parts: TemplateStringsArray, ...holes: unknown[]): Html {
  let text = parts[0]!;
  for (const [k, hole] of holes.entries()) text += filled(hole) + parts[k + 1]!;
  return new Html(text);
}

function filled(hole: unknown): string {
  if (hole instanceof Html) return hole.text;
  if (Array.isArray(hole)) return hole.map(filled).join("");
  return hole === null || hole === undefined || hole === false ? "" : escapeHtml(String(hole));
}

/** A `data:` address that a browser saves as a file; only what an attribute or an address can't hold is encoded. */
export function csvAddress(csv: string): string {
  // With a byte-order mark spreadsheets take it as UTF-8.
  const text = `\ufeff${csv}`.toWellFormed().replace(/[%#&"'<>]|[^ -~]+/g, encodeURIComponent)
    .replaceAll("'", "%27");
  return `data:text/csv;charset=utf-8,${text.replaceAll(" ", "%20")}`;
}
