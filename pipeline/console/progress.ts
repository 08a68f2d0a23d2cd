/** Where a progress bar is drawn: standard error, or a stand-in. */
export interface ProgressOutput {
  isTerminal(): boolean;
  writeSync(bytes: Uint8Array): number;
}

export interface Progress extends Disposable {
  /** Sets how much is done. */
  update(done: number, total: number): void;
}

const BAR = 24;
const MIN_MS = 80;

/**
 * A bar on standard error, only where that is a terminal: `reading  [=====>    ]  12/40`. It is wiped when disposed of.
 */
export function progressBar(
  label: string,
  output: ProgressOutput = Deno.stderr,
  now: () => number = () => performance.now(),
): Progress {
  if (!output.isTerminal()) return { update() {}, [Symbol.dispose]() {} };
  const write = (text: string) => output.writeSync(new TextEncoder().encode(text));
  let drawn = -Infinity;
  return {
    update(done, total) {
      const time = now();
      if (time - drawn < MIN_MS && done < total) return;
      drawn = time;
      const filled = total > 0 ? Math.round(BAR * Math.min(1, done / total)) : 0;
      const bar = "=".repeat(Math.max(0, filled - 1)) + (filled > 0 ? ">" : "");
      write(`\r\x1b[K${label}  [${bar.padEnd(BAR)}]  ${done}/${total}`);
    },
    [Symbol.dispose]() {
      if (drawn > -Infinity) write("\r\x1b[K");
    },
  };
}
