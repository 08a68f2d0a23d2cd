/** A piece of SQL text; white space and comments are left out. */
export interface Token {
  readonly kind: "word" | "quoted" | "string" | "number" | "symbol";
  /** A word in lower case; a quoted name without its quotes. */
  readonly text: string;
  /** How many parentheses are open around it. */
  readonly depth: number;
}

// In this order: comments, dollar-quoted text, strings (E'…' knows backslashes), quoted names, words, numbers, the rest.
const PIECE = new RegExp(
  [
    /(?<skip>\s+|--[^\n]*|\/\*[\s\S]*?(?:\*\/|$))/,
    /(?<string>\$(?<tag>[A-Za-z_]*)\$[\s\S]*?\$\k<tag>\$|[eE]'(?:[^'\\]|\\[\s\S]|'')*'|'(?:[^']|'')*')/,
    /"(?<quoted>(?:[^"]|"")*)"/,
    /(?<word>[\p{L}_][\p{L}\p{N}_$]*)/u,
    /(?<number>\d[\w.]*)/,
    /(?<symbol>[\s\S])/,
  ].map((part) => part.source).join("|"),
  "gu",
);

/** Cuts SQL text into tokens, well enough to see names, keywords and where statements end. */
export function sqlTokens(sql: string): Token[] {
  const tokens: Token[] = [];
  let depth = 0;
  for (const { groups } of sql.matchAll(PIECE)) {
    const { string, quoted, word, number, symbol } = groups!;
    if (symbol === ")") depth--;
    if (string !== undefined) tokens.push({ kind: "string", text: string, depth });
    else if (quoted !== undefined) tokens.push({ kind: "quoted", text: quoted.replaceAll('""', '"'), depth });
    else if (word !== undefined) tokens.push({ kind: "word", text: word.toLowerCase(), depth });
    else if (number !== undefined) tokens.push({ kind: "number", text: number, depth });
    else if (symbol !== undefined) tokens.push({ kind: "symbol", text: symbol, depth });
    if (symbol === "(") depth++;
  }
  return tokens;
}

/** Every name in the text that may be a table's, in lower case. */
export function namesInSql(tokens: readonly Token[]): Set<string> {
  return new Set(
    tokens.filter((token) => token.kind === "word" || token.kind === "quoted").map((token) =>
      token.text.toLowerCase()
    ),
  );
}

const READING_WORDS = [
  "select",
  "with",
  "from",
  "values",
  "describe",
  "desc",
  "show",
  "summarize",
  "explain",
  "pivot",
  "unpivot",
];
const WRITING_WORDS = ["insert", "update", "delete", "merge", "copy", "create", "drop", "alter"];

/**
 * Says why a text is no single reading statement, or null if it is one. It keeps a call from looking as if it had changed
 * something; the engine could not change the ledger anyway.
 */
export function refusalOf(tokens: readonly Token[]): string | null {
  const end = tokens.findIndex((token) => token.kind === "symbol" && token.text === ";");
  if (end >= 0 && tokens.slice(end).some((token) => token.text !== ";" || token.kind !== "symbol")) {
    return "found more than one statement, need one";
  }
  const words = tokens.filter((token) => !(token.kind === "symbol" && token.text === "("));
  const [first, ...rest] = words;
  if (first === undefined || first.text === ";") return "found no statement";
  if (first.kind !== "word" || !READING_WORDS.includes(first.text)) {
    return `found "${first.text}", need a statement that reads: SELECT, WITH, VALUES, DESCRIBE, SHOW, SUMMARIZE or EXPLAIN`;
  }
  if (first.text === "explain") return refusalOf(rest[0]?.text === "analyze" ? rest.slice(1) : rest);
  const writing = first.text === "with"
    ? rest.find((token) =>
      token.kind === "word" && token.depth === first.depth && WRITING_WORDS.includes(token.text)
    )
    : undefined;
  return writing === undefined ? null : `found "${writing.text}", need a statement that reads`;
}

/** The first word of a statement, in lower case. */
export const firstWord = (tokens: readonly Token[]): string =>
  tokens.find((token) => token.kind === "word")?.text ?? "";
