import { namesInSql, type Token } from "./sql_text.ts";

/** Words after which a statement may use columns that it does not name. */
const UNNAMED = ["columns", "natural", "pivot", "unpivot", "summarize", "describe", "desc", "show", "table"];

/**
 * Names among which all columns of a SELECT are, or null when it may use more than it names: `*` (but for `count(*)`),
 * COLUMNS(…), natural joins, FROM without SELECT, and a table's name or alias as a value (the whole row).
 * Too many names cost time, one too few would change an answer: in doubt it is null.
 */
export function columnsInSql(tokens: readonly Token[], tables: ReadonlySet<string>): Set<string> | null {
  const at = (i: number) => tokens[i]?.text.toLowerCase() ?? "";
  const isName = (i: number) => tokens[i]?.kind === "word" || tokens[i]?.kind === "quoted";
  const rowNames = new Set<string>();
  for (let i = 0; i < tokens.length; i++) {
    if (tokens[i]!.kind === "symbol" && at(i) === "*" && !(at(i - 2) === "count" && at(i - 1) === "(")) {
      return null;
    }
    if (tokens[i]!.kind === "word" && UNNAMED.includes(at(i))) return null;
    if (at(i) === "from" && (i === 0 || at(i - 1) === "(")) return null;
    if (!isName(i) || !tables.has(at(i))) continue;
    rowNames.add(at(i));
    const alias = at(i + 1) === "as" ? i + 2 : i + 1;
    if (isName(alias)) rowNames.add(at(alias));
  }
  // Each of these names may stand as `name.column` or where the relation is named, and nowhere else.
  for (let i = 0; i < tokens.length; i++) {
    if (!isName(i) || !rowNames.has(at(i)) || at(i + 1) === ".") continue;
    const declared = ["from", "join"].includes(at(i - 1));
    const aliased = tables.has(at(i - 1)) || (at(i - 1) === "as" && tables.has(at(i - 2)));
    if (!declared && !aliased) return null;
  }
  return namesInSql(tokens);
}
