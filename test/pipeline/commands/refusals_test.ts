// What the command line adds when something is wrong: the exit code, one sentence on standard error, nothing on standard
// output, nothing written. What each file mistake means is tested with the stage that finds it.
import { deepEqual, equal, match, ok } from "node:assert/strict";
import { join } from "node:path";
import * as lot from "../../run_folder.ts";
import { type Call, wavelot } from "../../run_wavelot.ts";

const files = lot.runFiles(() => 0.07);
const encoder = new TextEncoder();

async function exists(path: string): Promise<boolean> {
  try {
    await Deno.stat(path);
    return true;
  } catch {
    return false;
  }
}

/** Calls, two at a time: the machine that runs the tests may have no more cores. */
async function inPairs<T, R>(items: readonly T[], of: (item: T) => Promise<R>): Promise<R[]> {
  const out: R[] = [];
  for (let k = 0; k < items.length; k += 2) out.push(...await Promise.all(items.slice(k, k + 2).map(of)));
  return out;
}

const MODES = "wafer,die,guide,wavelength_nm,polarisation,mfd_x_um,mfd_y_um,u_mfd_um";
const modes = (text: string) => ({
  "lot.json": JSON.stringify({ ...lot.lotJson(), columns: {} }),
  "readings/modes.csv": text,
});
const ROW = "Z09-1,01,g1,1550,TE,7.1,5.9,0.1";
const withLot = (over: object) => ({
  "lot.json": JSON.stringify({ ...lot.lotJson(), columns: {}, ...over }),
});

/** Run folders (two files and what is given) that `ingest` must refuse, and what it must say. */
const REFUSED:
  readonly (readonly [what: string, files: Record<string, string | Uint8Array>, says: RegExp])[] = [
    ["an empty file", modes(""), /readings\/modes\.csv.*no line of headings; need wafer,die/],
    [
      "wrong headings",
      modes(`wafer,die,guide,lambda,pol,x,y\n${ROW}\n`),
      /readings\/modes\.csv.*wavelength_nm/s,
    ],
    [
      "semicolons that nobody declared",
      modes(`${MODES.replaceAll(",", ";")}\n${ROW.replaceAll(",", ";")}\n`),
      /readings\/modes\.csv.*";"/s,
    ],
    [
      "decimal commas that nobody declared",
      modes(`${MODES}\nZ09-1,01,g1,1550,TE,"7,1","5,9","0,1"\nZ09-1,01,g1,1550,TM,"7,1","5,9","0,1"\n`),
      /readings\/modes\.csv.*decimal/s,
    ],
    ["a truncated Parquet file", {
      ...modes(`${MODES}\n`),
      "readings/walls.parquet": encoder.encode("PAR1 and then nothing"),
    }, /readings\/walls\.parquet/],
    [
      "an unknown platform",
      withLot({ platform: "bulk-xyz" }),
      /Unknown platform "bulk-xyz": known are bulk-ktp/,
    ],
    [
      "a lot.json that is no JSON",
      { "lot.json": '{\n "lot": "Z09",\n oops\n}' },
      /lot\.json:3: not valid JSON/,
    ],
    ["a lot.json without its lot", { "lot.json": "{}" }, /lot\.json/],
  ];

Deno.test("ingest refuses with exit 2, one sentence and no ledger", async () => {
  const root = await Deno.makeTempDir({ prefix: "refuse-" });
  try {
    await inPairs([...REFUSED.entries()], async ([k, [what, given, says]]) => {
      const folder = join(root, `run${k}`);
      await lot.writeFiles(folder, { "guides.csv": files["guides.csv"]!, ...given });
      const call = await wavelot([
        "ingest",
        folder,
        "--ledger",
        join(root, `ledger${k}`),
        "--format",
        "json",
      ]);
      refused(call, says, what);
      equal(await exists(join(root, `ledger${k}`)), false, `${what}: a ledger was left`);
    });
    await lot.writeFiles(join(root, "empty"), { "guides.csv": files["guides.csv"]! });
    refused(
      await wavelot(["ingest", join(root, "empty"), "--ledger", join(root, "l")]),
      /it has no lot\.json; need/,
      "no lot.json",
    );
    await lot.writeFiles(root, { "a-file": "not a folder" });
    const whole = join(root, "whole");
    await lot.writeFiles(whole, files);
    refused(
      await wavelot(["ingest", whole, "--ledger", join(root, "a-file")]),
      /as a ledger: found a file, need a folder/,
      "a file",
    );
    refused(
      await wavelot(["ingest", whole, "--ledger", join(root, "a-file", "x")]),
      /as a ledger/,
      "below a file",
    );
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});

function refused({ code, stdout, stderr }: Call, says: RegExp, what: string): void {
  equal(code, 2, `${what}: ${stderr}`);
  equal(stdout, "", what);
  match(stderr, says, what);
  match(stderr, /^wavelot: [A-Z]/, what);
  ok(!/\n\s+at /.test(stderr), `${what}: a stack is not for users`);
}

Deno.test("ingest keeps rows aside with exit 1 and takes oddly written files with exit 0", async () => {
  const root = await Deno.makeTempDir({ prefix: "aside-" });
  const design = files["guides.csv"]!;
  const first = design.split("\n")[1]!;
  const cases = [
    [
      "not a number",
      modes(`${MODES}\n${ROW}\n${ROW.replace("7.1", "NaN")}\n${ROW.replace("7.1", "Infinity")}\n`),
      1,
      3,
      2,
    ],
    [
      "a line of ten megabytes",
      modes(`${MODES}\n${ROW}\nZ09-1,01,g1,1550,TE,${"7".repeat(1e7)},5.9,0.1\n`),
      1,
      2,
      1,
    ],
    ["byte order mark and Windows line ends", modes(`\uFEFF${MODES}\r\n${ROW}\r\n`), 0, 1, 0],
    [
      "declared semicolons and decimal commas",
      {
        ...modes(`${MODES.replaceAll(",", ";")}\nZ09-1;01;g1;1550;TE;7,1;5,9;0,1\n`),
        ...withLot({ reading_style: { modes: { delimiter: ";", decimal: "," } } }),
      },
      0,
      1,
      0,
    ],
    [
      "a guide listed twice",
      { ...modes(`${MODES}\n${ROW}\n`), "guides.csv": `${design}${first}\n` },
      1,
      1,
      0,
    ],
  ] as const;
  try {
    await inPairs([...cases.entries()], async ([k, [what, given, code, rows, aside]]) => {
      const folder = join(root, `run${k}`);
      await lot.writeFiles(folder, { "guides.csv": design, ...given });
      const call = await wavelot([
        "ingest",
        folder,
        "--ledger",
        join(root, `ledger${k}`),
        "--format",
        "json",
      ]);
      equal(call.code, code, `${what}: ${call.stderr}`);
      const result = JSON.parse(call.stdout);
      const file = result.files.find((f: { name: string }) => f.name === "readings/modes.csv");
      deepEqual([file.rows, file.quarantined], [rows, aside], what);
      equal(result.accepted + result.quarantined, result.rows);
      match(call.stderr, code === 1 ? /rows (is|are) quarantined: wavelot sql/ : /^/, what);
    });
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});

Deno.test("rank and predict refuse a request that can't be met by any lot, before anything is computed", async () => {
  const root = await Deno.makeTempDir({ prefix: "asking-" });
  const { open, double } = lot.REQUESTS;
  const { fwhm_ps: _, repetition_mhz: __, ...cw } = open.pump;
  const unlit = {
    request: "far",
    process: "second-harmonic",
    polarisations: { pump: "TE", signal: "TE", idler: "TM" },
    signal: { wavelength_nm: 860 },
    oven_c: [20, 90],
  };
  const call = (...args: string[]) => wavelot(args, root);
  try {
    await lot.writeFiles(join(root, "Z09"), { ...files, "lot.json": JSON.stringify(lot.lotJson()) });
    equal((await call("ingest", "Z09")).code, 1);
    await lot.writeRequests(root, {
      "unknown-figure": { ...open, require: [{ figure: "brightness", at_least: 1 }] },
      "pure-cw": { ...open, pump: cw, require: [{ figure: "purity", at_least: 0.8 }] },
      "far": unlit,
      "misses": { ...open, idler: { ...open.idler, wavelength_nm: 1583 } },
      "typo": { ...open, oven: [20, 90] },
    });
    await lot.writeFiles(root, { "broken.json": '{\n  "request": "broken",\n  "process": \n}' });
    await lot.writeRequests(join(root, "twice"), { a: double, b: double });
    const runs = async () =>
      (await Array.fromAsync(Deno.readDir(join(root, "ledger", "runs")))).map((e) => e.name);
    const before = await runs();
    const refusals = [
      [
        ["rank", "unknown-figure.json"],
        /require\[0\]\.figure: "brightness" is not a figure; known: operating_temperature_c/,
      ],
      [
        ["rank", "pure-cw.json"],
        /require\[0\]\.figure: "purity" can't exist: not a figure of a continuous-wave pump/,
      ],
      [
        ["rank", "far.json"],
        /pump\.wavelength_nm is 430\.0 nm, outside the index of KTP for TE \(450\.0–3500\.0 nm\)/,
      ],
      [["rank", "misses.json"], /idler\.wavelength_nm: 1583 nm breaks energy conservation/],
      [["rank", "typo.json"], /oven/],
      [["rank", "broken.json"], /broken\.json(:\d+)?: not valid JSON/],
      [["rank", "nobody-knows"], /Unknown request "nobody-knows": known are .*; or give the path/],
      [["rank", "missing.json"], /missing\.json: there is no such file/],
      [["rank", "double", "--requests", "no-such-folder"], /request folder no-such-folder/],
      [["predict", "--requests", "no-such-folder"], /request folder no-such-folder/],
      [["predict", "--requests", "twice"], /two requests called double: .*a\.json and .*b\.json/],
      [["rank", "double", "--requests", "twice", "--lot", "Q1"], /two requests called double/],
      [["predict", "Q1", "--requests", "."], /Cannot (read|use) request .*\.json/],
      [["rank", "heralded-1582", "--lot", "Q1"], /Unknown lot "Q1": the ledger .* holds Z09/],
      [["rank", "heralded-1582", "--ledger", "nowhere"], /found none there; take in a run folder first/],
      [["sql", "SELECT * FROM no_such_table"], /no_such_table/],
    ] as const;
    await inPairs(refusals, async ([args, says]) => refused(await call(...args), says, args.join(" ")));
    deepEqual(await runs(), before);
  } finally {
    await Deno.remove(root, { recursive: true });
  }
});
