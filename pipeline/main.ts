// The command line: parses, calls one stage, prints. Exit codes and streams: see the README.
import { Command, CommanderError, InvalidArgumentError, Option } from "commander";
import config from "../deno.json" with { type: "json" };
import { InputError, LedgerError } from "../shared/errors.ts";
import type { Format } from "./console/mod.ts";

/** What a command's action hands back: its exit code. */
type Exit = 0 | 1 | 3;

const program = new Command("wavelot")
  .description(
    "Follows a wafer of nonlinear waveguides from fabrication records to what each chip will do as a light source.",
  )
  .version(config.version)
  .showHelpAfterError("(--help shows the calls)")
  .configureOutput({ writeErr: (text) => Deno.stderr.writeSync(new TextEncoder().encode(text)) })
  .exitOverride();

const ledgerOption = () => new Option("--ledger <dir>", "the ledger's folder").default("./ledger");
const platformsOption = () => new Option("--platforms <dir>", "a folder of your own platform files");
const requestsOption = () =>
  new Option("--requests <dir>", "the folder of request files (default: ./requests, then the examples)");
const formatOption = () =>
  new Option("--format <format>", "how to print").choices(["table", "csv", "json"]).default("table");
/** Of commands that write a page: `table` stands for the page itself. */
const pageFormatOption = (choices: string) =>
  new Option("--format <format>", `${choices}: print the content in place of a page`)
    .choices(["table", "csv", "json"]).default("table", "the page of --out");
const workersOption = () =>
  new Option("--workers <n>", "threads to compute on (default: all cores)").argParser(wholeNumber(1));

function wholeNumber(least: number): (text: string) => number {
  return (text) => {
    const n = Number(text);
    if (!Number.isSafeInteger(n) || n < least) {
      throw new InvalidArgumentError(`need a whole number of ${least} or more`);
    }
    return n;
  };
}
function anyNumber(text: string): number {
  const n = Number(text);
  if (text.trim() === "" || !Number.isFinite(n)) throw new InvalidArgumentError("need a number");
  return n;
}
function positiveNumber(text: string): number {
  const n = anyNumber(text);
  if (!(n > 0)) throw new InvalidArgumentError("need a number above 0");
  return n;
}
const collect = (text: string, before: string[]) => [...before, text];

function command(name: string, description: string, example: string): Command {
  return program.command(name).description(description).addHelpText(
    "after",
    `\nExample:\n  wavelot ${example}`,
  );
}

let exit: Exit = 0;
/** An action: its options are the last but one argument. */
const run = <A extends unknown[]>(action: (...args: A) => Promise<Exit>) => async (...args: A) => {
  exit = await action(...args);
};

interface Common {
  readonly ledger: string;
  readonly platforms?: string;
  readonly requests?: string;
  readonly format: Format;
  readonly workers?: number;
}

interface SensitivityOptions {
  readonly process?: string;
  readonly wavelength?: string;
  readonly width?: number;
  readonly temperature?: number;
  readonly lot?: string;
}

command("ingest", "take the records of a run folder into the ledger", "ingest runs/K07 --ledger ledger")
  .argument("<run-folder>", "a folder with lot.json, guides.csv and readings/")
  .addOption(ledgerOption()).addOption(platformsOption()).addOption(formatOption())
  .action(run(async (folder: string, options: Common) => {
    const { ingestCommand } = await import("./commands/ingest.ts");
    return await ingestCommand(folder, options);
  }));

command("predict", "compute the figures of every guide for every request", "predict K07 --requests requests")
  .argument("[lot]", "one lot (default: every lot of the ledger)")
  .addOption(ledgerOption()).addOption(platformsOption()).addOption(requestsOption()).addOption(
    workersOption(),
  )
  .addOption(formatOption())
  .action(run(async (lot: string | undefined, options: Common) => {
    const { predictCommand } = await import("./commands/predict.ts");
    return await predictCommand(lot, options);
  }));

command(
  "rank",
  "order the dies for a request, each with its best guide",
  "rank heralded-1582 --lot K07 --top 10",
)
  .argument("<request>", "a request's name, or the path of its file")
  .addOption(
    new Option("--lot <lot>", "only this lot; may repeat").argParser(collect).default([], "every lot"),
  )
  .option("--all-guides", "one line per guide, dies that can't be shipped included")
  .addOption(new Option("--top <n>", "the first n only").argParser(wholeNumber(1)))
  .option("--explain <die|guide>", "why one die or guide is decided as it is, and what would help")
  .addOption(ledgerOption()).addOption(platformsOption()).addOption(requestsOption()).addOption(
    workersOption(),
  )
  .addOption(formatOption())
  .action(
    run(async (
      request: string,
      options: Common & { lot: string[]; allGuides?: true; top?: number; explain?: string },
    ) => {
      const { rankCommand } = await import("./commands/rank.ts");
      return await rankCommand(request, options);
    }),
  );

command(
  "trace",
  "show what a figure rests on, down to file and line",
  "trace K07-1/05/g12 --figure heralding_signal",
)
  .argument("<die|guide>", "a full id, such as K07-1/05 or K07-1/05/g12")
  .requiredOption("--figure <name>", "the figure to trace")
  .option("--request <request>", "the request that the figure belongs to (needed when there are several)")
  .addOption(ledgerOption()).addOption(platformsOption()).addOption(requestsOption()).addOption(
    formatOption(),
  )
  .action(run(async (id: string, options: Common & { figure: string; request?: string }) => {
    const { traceCommand } = await import("./commands/trace.ts");
    return await traceCommand(id, options);
  }));

command(
  "sensitivity",
  "show what small errors of width, thickness and temperature do to a design",
  "sensitivity rb-ktp-zcut --process TE>TE+TM --wavelength 1582 --width 3",
)
  .argument("<platform|lot|request>", "a platform or a lot, or with --lot a request")
  .option("--process <process>", 'polarisations as pump>signal+idler, such as "TE>TE+TM"')
  .option("--wavelength <nm>", "of signal and idler; two with a comma where they differ")
  .option("--width <um>", "drawn width (default: every width of the lot)", positiveNumber)
  .option("--temperature <c>", "for a design without a period (default: 25 °C)", anyNumber)
  .option("--lot <lot>", "the lot whose designs a request is asked about")
  .addOption(ledgerOption()).addOption(platformsOption()).addOption(requestsOption()).addOption(
    workersOption(),
  )
  .addOption(formatOption())
  .action(run(async (subject: string, options: Common & SensitivityOptions) => {
    const { sensitivityCommand } = await import("./commands/sensitivity.ts");
    return await sensitivityCommand(subject, options);
  }));

command(
  "sql",
  "ask the ledger in SQL (read only)",
  'sql "SELECT die_id, count(*) FROM cutback GROUP BY die_id"',
)
  .argument("<query>", "one statement")
  .addOption(ledgerOption()).addOption(formatOption())
  .action(run(async (query: string, options: Common) => {
    const { sqlCommand } = await import("./commands/sql.ts");
    return await sqlCommand(query, options);
  }));

const requestOption = () =>
  new Option(
    "--request <request>",
    "only for this request, by name or path; may repeat",
  ).argParser(collect).default([], "those predicted that the lot can be tuned to");

const RULES_HELP = `
Your own rules (--rules FILE), as JSON:
  { "rules": [
    { "rule": "loss-high", "above_default_by_u": 4 },   changes fields of a built-in rule
    { "rule": "coating-unknown", "off": true },         silences one
    { "rule": "loss-limit", "kind": "trait_limit", "trait": "loss_db_cm",
      "at_most": 0.5, "confidence": 0.95, "severity": "watch" }   adds one
  ] }
The built-in ones are in pipeline/query/flag_rules.json; editors check a file by
shared/schemas/json/flag-rules.schema.json.`;

command("flag", "say what is out of line in a lot, and what may be behind it", "flag K07 --ledger ledger")
  .addHelpText("after", RULES_HELP)
  .argument("[lot]", "one lot (default: every lot of the ledger)")
  .addOption(requestOption())
  .option("--rules <file>", "your own rules, beside or in place of the built-in ones (see flag --help)")
  .addOption(ledgerOption()).addOption(platformsOption()).addOption(requestsOption()).addOption(
    workersOption(),
  )
  .addOption(formatOption())
  .action(run(async (lot: string | undefined, options: Common & { request: string[]; rules?: string }) => {
    const { flagCommand } = await import("./commands/flag.ts");
    return await flagCommand(lot, options);
  }));

command("review", "write the review of a lot as one page", "review K07 --out K07.html")
  .argument("<lot>", "the lot")
  .addOption(requestOption())
  .option("--rules <file>", "your own rules, beside or in place of the built-in ones (see flag --help)")
  .option("--out <file>", "the page to write (HTML, needs nothing else)")
  .addOption(ledgerOption()).addOption(platformsOption()).addOption(requestsOption()).addOption(
    workersOption(),
  )
  .addOption(pageFormatOption("json or csv"))
  .action(
    run(async (lot: string, options: Common & { request: string[]; rules?: string; out?: string }) => {
      const { reviewCommand } = await import("./commands/review.ts");
      return await reviewCommand(lot, options);
    }),
  );

command("sheet", "write the page that travels with a die", "sheet K07-1/05 --out K07-1-05.html")
  .argument("<die>", "a full die id, such as K07-1/05")
  .addOption(requestOption())
  .option("--out <file>", "the page to write (HTML, one page of A4)")
  .addOption(ledgerOption()).addOption(platformsOption()).addOption(requestsOption()).addOption(
    workersOption(),
  )
  .addOption(pageFormatOption("json"))
  .action(run(async (die: string, options: Common & { request: string[]; out?: string }) => {
    const { sheetCommand } = await import("./commands/sheet.ts");
    return await sheetCommand(die, options);
  }));

command("check", "verify every hash of the ledger", "check --ledger ledger")
  .addOption(ledgerOption()).addOption(formatOption())
  .action(run(async (options: Common) => {
    const { checkCommand } = await import("./commands/check.ts");
    return await checkCommand(options);
  }));

command(
  "demo",
  "make invented lots of a made-up facility and run the whole job on them",
  "demo --out demo-out",
)
  .addOption(
    new Option("--out <dir>", "where the invented run folders and their ledger go").default("demo-out"),
  )
  .addOption(workersOption())
  .action(run(async (options: { out: string; workers?: number }) => {
    const { demoCommand } = await import("./commands/demo.ts");
    return await demoCommand(options);
  }));

/** Runs the command line; the exit code is the answer. */
export async function main(args: readonly string[]): Promise<number> {
  try {
    await program.parseAsync([...args], { from: "user" });
    return exit;
  } catch (error) {
    if (error instanceof CommanderError) return error.exitCode === 0 ? 0 : 2;
    if (error instanceof InputError || error instanceof LedgerError) {
      console.error(`wavelot: ${error.message}`);
      return error.exitCode;
    }
    console.error("wavelot: an error of the program itself; please report it with what led to it");
    console.error(error);
    return 70; // EX_SOFTWARE of sysexits.h: none of the codes 0–3 would be true
  }
}

if (import.meta.main) Deno.exit(await main(Deno.args));
