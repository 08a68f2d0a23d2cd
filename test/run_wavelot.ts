import { fileURLToPath } from "node:url";
import config from "../deno.json" with { type: "json" };

const ROOT = fileURLToPath(new URL("..", import.meta.url));

/** What a call of the command line did. */
export interface Call {
  readonly code: number;
  readonly stdout: string;
  readonly stderr: string;
}

/** Runs the command line as the `wavelot` task does, with that task's own permissions. */
export async function wavelot(args: readonly string[], cwd = ROOT): Promise<Call> {
  const [deno, ...words] = config.tasks.wavelot.command.split(" ");
  if (deno !== "deno") throw new Error(`The wavelot task no longer starts with deno: ${deno}`);
  const main = words.pop()!;
  const { code, stdout, stderr } = await new Deno.Command(Deno.execPath(), {
    args: [...words, `--config=${ROOT}deno.json`, `${ROOT}${main}`, ...args],
    cwd,
    env: { NO_COLOR: "1" },
    stdin: "null",
  }).output();
  const text = (bytes: Uint8Array) => new TextDecoder().decode(bytes);
  return { code, stdout: text(stdout), stderr: text(stderr) };
}
