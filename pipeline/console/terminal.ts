/** Columns of the terminal; 80 where the output is a file or a pipe. */
export function outputWidth(): number {
  if (!Deno.stdout.isTerminal()) return 80;
  try {
    return Math.max(40, Deno.consoleSize().columns);
  } catch {
    return 80;
  }
}

/** Colour only on a terminal, and not where NO_COLOR is set to anything (no-color.org). */
export function useColour(
  isTerminal = Deno.stdout.isTerminal(),
  noColor = Deno.env.get("NO_COLOR"),
): boolean {
  return isTerminal && (noColor === undefined || noColor === "");
}
