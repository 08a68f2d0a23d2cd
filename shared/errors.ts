// Pure: no I/O, no clock, no hidden randomness.

/** Where in the input something was found; every field is optional because a call has no file and a JSON file no line. */
export interface Place {
  readonly file?: string;
  readonly line?: number;
  readonly column?: string;
  readonly value?: string;
}

/** The call or a file was wrong and nothing was written: exit code 2. The message says what would be right. */
export class InputError extends Error {
  override readonly name = "InputError";
  readonly exitCode = 2;
  constructor(message: string, readonly place: Place = {}, options?: ErrorOptions) {
    super(message, options);
  }
}

/** The ledger is damaged or locked: exit code 3. */
export class LedgerError extends Error {
  override readonly name = "LedgerError";
  readonly exitCode = 3;
  constructor(message: string, readonly place: Place = {}, options?: ErrorOptions) {
    super(message, options);
  }
}

/** `file:line, column "x": ` — the part of a place that is known, ready to stand before a message. */
export function placeText(place: Place): string {
  const at = place.file === undefined
    ? ""
    : place.line === undefined
    ? place.file
    : `${place.file}:${place.line}`;
  const column = place.column === undefined ? "" : `column "${place.column}"`;
  const parts = [at, column].filter((part) => part !== "");
  return parts.length === 0 ? "" : `${parts.join(", ")}: `;
}

/** A value as it may stand in a message: quoted, control characters escaped, cut to `limit` characters. */
export function quoteValue(value: unknown, limit = 60): string {
  const text = JSON.stringify(value === undefined ? "" : String(value));
  return text.length <= limit ? text : `${text.slice(0, limit - 2)}…"`;
}
