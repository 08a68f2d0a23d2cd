/** Why a cell is no number, and what would be. */
export interface NoNumber {
  readonly reason: string;
  readonly hint?: string;
}

const PLAIN = /^[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?$/;
const WITH_COMMA = /^[+-]?(?:\d+,\d*|,\d+)(?:[eE][+-]?\d+)?$/;

/**
 * The number that a cell holds. Digits, one decimal mark and an exponent only: no thousands separators, no hexadecimal, no
 * `Infinity`, so that what a reader sees is what is taken. The cell is not empty.
 */
export function parseNumber(cell: string, decimal: "." | ","): number | NoNumber {
  const text = decimal === "," ? (cell.includes(".") ? "" : cell.replace(",", ".")) : cell;
  if (PLAIN.test(text)) {
    const value = Number(text);
    return Number.isFinite(value) ? value : { reason: "the number is too large to hold" };
  }
  if (/^[+-]?nan$/i.test(cell)) return { reason: "the cell is not a number (NaN)" };
  if (/^[+-]?inf(inity)?$|^[+-]?∞$/i.test(cell)) return { reason: "the cell is infinite" };
  if (isDecimalComma(cell)) return { reason: "the number has a comma", hint: "written with a decimal point" };
  if (decimal === "," && PLAIN.test(cell)) {
    return {
      reason: "the number has a point, the file a decimal comma",
      hint: "written with a decimal comma",
    };
  }
  if (/^[\u2212\u2013]/.test(cell)) {
    return { reason: "the number begins with a typographic minus", hint: "with a plain -" };
  }
  if (/^[+-]?\d{1,3}([ ,.'\u00a0\u202f]\d{3})+([.,]\d+)?$/.test(cell)) {
    return { reason: "the number has thousands separators", hint: "without them" };
  }
  return { reason: "the cell is not a number" };
}

/** `12,5`: one comma where a decimal point would stand. */
export const isDecimalComma = (cell: string): boolean => WITH_COMMA.test(cell);
