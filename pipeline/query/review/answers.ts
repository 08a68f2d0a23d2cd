import { compareIds } from "../../../shared/ids.ts";
import type { Answers, ChartReview, RequestReview, ReviewFlag } from "../../review_types.ts";
import { num, percent, plural } from "../flag/types.ts";
import { gainWords } from "./gain_words.ts";

/** Lots of the platform before this one. */
export interface LotsBefore {
  readonly platform: string;
  readonly before: number;
  readonly compared: number;
  /** What is not compared and why, in sentences. */
  readonly leftOut: readonly string[];
}

const NOTHING_PREDICTED = "No request was predicted that a guide of the lot matches";

/** What the first screen says: the answers that the meeting came for, in words. */
export function answersOf(
  requests: readonly RequestReview[],
  flags: readonly ReviewFlag[],
  charts: readonly ChartReview[],
  lots: LotsBefore,
): Answers {
  return {
    how: [
      ...(requests.length === 0 ? [NOTHING_PREDICTED] : requests.map(howDid)),
      comparedWith(requests, charts, lots),
      ...lots.leftOut,
    ],
    out: outOf(flags),
    behind: behind(flags),
    pay_off: requests.length === 0 ? [NOTHING_PREDICTED] : payOff(requests, flags),
    goes: requests.length === 0 ? [NOTHING_PREDICTED] : requests.flatMap(goes),
  };
}

function howDid({ request, total, wafers }: RequestReview): string {
  if (total.value === null) return `${request}: no die of the lot can be shipped`;
  const interval = ({ low, high }: { low: number; high: number }) =>
    `${num(100 * Number(low.toFixed(2)))} to ${percent(Number(high.toFixed(2)))}`;
  const hold = total.hold === 0 ? "" : `, ${total.hold} on hold`;
  const head = `${request}: ${total.good} of ${plural(total.of, "die")} accepted${hold}, ${
    percent(Number(total.value.toFixed(2)))
  }`;
  if (wafers.length < 2) return `${head} (95 % interval ${interval(total)})`;
  // Wafers first: dies share their wafer's fate, and wafers that differ say little about a further one.
  const each = wafers.slice(0, 4).map((w) => `${w.wafer} ${w.good} of ${w.of} (${interval(w)})`).join(", ");
  const further = total.high - total.low > 0.9
    ? ""
    : `; 95 % interval for wafers like these ${interval(total)}`;
  return `${head}: ${each}${
    wafers.length > 4 ? ` and ${wafers.length - 4} more wafers` : ""
  }, 95 % intervals${further}`;
}

function comparedWith(
  requests: readonly RequestReview[],
  charts: readonly ChartReview[],
  { platform, before, compared }: LotsBefore,
): string {
  if (compared === 0) {
    return `Compared with earlier lots: ${
      before === 0 ? "there is none" : "none may be compared"
    } of ${platform} in this ledger`;
  }
  const yields = charts.filter((c) => c.key.startsWith("yield|"));
  if (yields.length === 0) {
    const why = charts.length > 0
      ? "no yield is charted (none to compare, or all alike)"
      : "too few for a control chart; see the yields over lots";
    const out = charts.filter((c) => c.signals.length > 0).map((c) => c.words);
    return `Compared with earlier lots: ${plural(compared, "lot")} of ${platform}, ${why}${
      charts.length === 0
        ? ""
        : out.length === 0
        ? "; every trait charted is in line"
        : `; out of line: ${out.join(", ")}`
    }`;
  }
  const traitsOut = charts.filter((c) => !c.key.startsWith("yield|") && c.signals.length > 0).map((c) =>
    c.words
  );
  return `Compared with earlier lots: ${
    requests.map((r) => yields.find((c) => c.key === `yield|${r.request}`)).filter((c) => c !== undefined)
      .map((c) =>
        `${c.key.slice(6)} ${c.signals.length === 0 ? "is in line" : "is out of line"}, ${
          plural(c.points.length - 1, "lot")
        } before have ${percent(c.centre)}`
      ).join("; ")
  }${traitsOut.length === 0 ? "; traits are in line" : `; out of line: ${traitsOut.join(", ")}`}`;
}

/** Flags that call for a decision, one line per lot, wafer or coating run. */
function outOf(flags: readonly ReviewFlag[]): string[] {
  const act = flags.filter((f) => f.severity === "act");
  const watch = flags.filter((f) => f.severity === "watch").length;
  const rest = watch === 0 ? "nothing else to look at" : `${watch} more to look at, below`;
  if (act.length === 0) return [`Nothing that has to be decided; ${rest}`];
  return [...byId(act)].map(([who, own]) => `${who}: ${own.map((f) => f.brief).join("; ")}`).concat(
    watch === 0 ? [] : [rest],
  );
}

function byId(flags: readonly ReviewFlag[]): Map<string, ReviewFlag[]> {
  const out = new Map<string, ReviewFlag[]>();
  for (const f of flags) {
    const who = `${
      f.scope === "coating_run" ? "Coating run" : f.scope === "wafer" ? "Wafer" : "Lot"
    } ${f.id}`;
    out.set(who, [...out.get(who) ?? [], f]);
  }
  return out;
}

/** The first suspect of everything that is out. */
function behind(flags: readonly ReviewFlag[]): string[] {
  const act = flags.filter((f) => f.severity === "act");
  if (act.length === 0) return ["Nothing is out, so nothing is looked for"];
  const lines: string[] = [];
  for (const [who, own] of byId(act)) {
    const seen = new Set<string>();
    for (const s of own.map((f) => f.suspects[0]).filter((s) => s !== undefined)) {
      if (seen.has(s.name)) continue;
      seen.add(s.name);
      // A coating run that is its own suspect need not be named twice.
      const sentence = s.name.toLowerCase().startsWith(who.toLowerCase())
        ? s.sentence.slice(s.name.length + 2)
        : s.sentence;
      lines.push(`${who}: ${sentence}`);
    }
    if (seen.size === 0) lines.push(`${who}: nothing on record parts what is affected from the rest`);
  }
  return lines;
}

/** What traits at target would bring, where most dies are lost, and what would decide those on hold. */
function payOff(requests: readonly RequestReview[], flags: readonly ReviewFlag[]): string[] {
  const rises = requests.flatMap((r) => r.gains.slice(0, 1).map((g) => `${r.request}: ${gainWords(g)}`));
  const lines = requests.flatMap((r): string[] => {
    const lost = r.ranked.filter((d) => d.unavailable === null && d.decision === "reject").map((d) => d.die);
    if (lost.length === 0) return [];
    const causes = causesOf(flags).map(({ words, has }) => ({ words, dies: lost.filter(has).length }))
      .filter((c) => c.dies > 0).sort((a, b) => b.dies - a.dies).slice(0, 3).map((c) =>
        `${c.dies} ${c.words}`
      );
    const first = r.limits.find((l) => l.rejected > 0);
    const limit = first === undefined
      ? ""
      : `; ${first.figure} limits ${first.rejected + first.on_hold}, of which ${
        first.would_pass === 0 ? "none" : first.would_pass
      } would pass if it alone were met`;
    return [
      `${r.request} loses ${lost.length} of ${plural(r.total.of, "die")}${
        causes.length === 0 ? "" : `: ${causes.join(", ")}`
      }${limit}`,
    ];
  });
  const lacking = requests.filter((r) => r.missing_readings.length > 0).map((r) =>
    `${r.request}, dies on hold for lack of: ${
      r.missing_readings.slice(0, 3).map((m) =>
        `${m.words} on ${plural(m.dies.length, "die")}, expected to decide ${num(m.decided, 2)}`
      ).join("; ")
    }`
  );
  // Where the prediction holds no worth of readings, at least what the dies on hold rest on.
  const told = new Set(requests.filter((r) => r.missing_readings.length > 0).map((r) => r.request));
  const holds = flags.filter((f) =>
    f.rule === "coverage-thin" && ![...told].some((r) => f.brief.endsWith(` ${r}`))
  )
    .map((f) => `To decide what is on hold: ${f.brief}; read them`);
  const all = [...rises, ...lines, ...lacking, ...holds];
  return all.length === 0 ? ["No die that can be shipped is lost"] : all;
}

interface Cause {
  readonly words: string;
  readonly has: (die: string) => boolean;
}

/** Wafers and coating runs that are out, each with its first suspect. */
function causesOf(flags: readonly ReviewFlag[]): Cause[] {
  const causes = new Map<string, Cause>();
  for (const f of flags.filter((f) => f.severity === "act" && f.scope !== "lot")) {
    if (causes.has(f.id)) continue;
    const suspect = f.suspects[0];
    const dies = new Set(f.dies);
    causes.set(
      f.id,
      f.scope === "wafer"
        ? {
          words: `on wafer ${f.id}${suspect === undefined ? "" : ` (${suspect.name})`}`,
          has: (die) => die.startsWith(`${f.id}/`),
        }
        : { words: `under coating run ${f.id}`, has: (die) => dies.has(die) },
    );
  }
  return [...causes.values()];
}

function goes({ request, ranked }: RequestReview): string[] {
  const list = (decision: "accept" | "hold") => {
    const dies = ranked.filter((d) => d.decision === decision && d.unavailable === null).map((d) => d.die);
    return dies.length === 0 ? "" : shortIds(dies);
  };
  const [accepted, held] = [list("accept"), list("hold")];
  const shipped = ranked.filter((d) => d.unavailable === null && d.decision === "accept");
  const doubted = shipped.filter((d) => d.contradicted.length > 0);
  // A die to be read again first is not the one to begin with.
  const best = shipped.find((d) => d.contradicted.length === 0) ?? shipped[0];
  return [
    accepted === ""
      ? `${request}: no die`
      : `${request}: ${accepted}; best is ${best!.guide} (probability ${num(best!.probability, 3)})`,
    ...(doubted.length === 0 ? [] : [
      `${request}, read again before it is shipped: ${
        doubted.map((d) => d.guide).join(", ")
      }, where a reading contradicts the others`,
    ]),
    ...(held === "" ? [] : [`${request}, on hold: ${held}`]),
  ];
}

/** `R08-1/01, 02, 05`: the wafer once. Longer lists are cut, the table has them all. */
function shortIds(dies: readonly string[], most = 24): string {
  const sorted = [...dies].sort(compareIds);
  const shown = sorted.slice(0, most);
  const groups = new Map<string, string[]>();
  for (const die of shown) {
    const cut = die.indexOf("/");
    const wafer = die.slice(0, cut);
    groups.set(wafer, [...groups.get(wafer) ?? [], die.slice(cut + 1)]);
  }
  const text = [...groups].map(([wafer, own]) => `${wafer}/${own.join(", ")}`).join("; ");
  return sorted.length > most ? `${text} and ${sorted.length - most} more` : text;
}
