/** A number as a page shows it: significant digits, a true minus sign, powers of ten written out, a dash for none. */
export function shown(x: number | null | undefined, digits = 3): string {
  if (x === null || x === undefined || Number.isNaN(x)) return "–";
  const power = x === 0 ? 0 : Math.floor(Math.log10(Math.abs(x)));
  const whole = Number.isInteger(x) && Math.abs(x) < 1e6 && digits >= 4;
  if (Number.isFinite(x) && !whole && (power >= 5 || power <= -5)) {
    return `${shown(x / 10 ** power, digits)} × 10${raised(power)}`;
  }
  return String(Number(x.toPrecision(digits))).replace("-", "−");
}

/** Value ± u, both to the digit that u's second figure is worth; large and tiny ones with a common power of ten. */
export function withU(value: number | null, u: number | null): string {
  if (value === null) return "–";
  if (u === null || !(u > 0)) return shown(value, 4);
  const power = Math.floor(Math.log10(Math.max(Math.abs(value), u)));
  if (power >= 5 || power <= -4) {
    return `(${withU(value / 10 ** power, u / 10 ** power)}) × 10${raised(power)}`;
  }
  const decimals = Math.min(8, Math.max(0, 1 - Math.floor(Math.log10(u))));
  return `${value.toFixed(decimals)} ± ${u.toFixed(decimals)}`.replace("-", "−");
}

const raised = (power: number): string => String(power).replace(/./g, (c) => "⁰¹²³⁴⁵⁶⁷⁸⁹"[Number(c)] ?? "⁻");

export const percentText = (x: number | null): string =>
  x === null ? "–" : `${shown(100 * x, x < 0.1 ? 2 : 3)} %`;

/** As the first word of a sentence. */
export const capitalised = (text: string): string => text.charAt(0).toUpperCase() + text.slice(1);
