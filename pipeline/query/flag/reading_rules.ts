import { waferOf } from "../../../shared/ids.ts";
import type { ReadingRef, TraitName } from "../../traits/trait_row.ts";
import type { ContradictionFact, LotFacts } from "./facts.ts";
import type { RuleOf, Severity } from "./rules.ts";
import { seriesWords, unitOf } from "./series.ts";
import { type Flag, mergeRefs, num, plural, pText, refText } from "./types.ts";
import { inPlay } from "./verdicts.ts";

/** More units of one wafer with the same finding are told together. */
const MOST_SINGLE = 3;

interface Finding {
  readonly code: string;
  readonly unit: string;
  readonly severity: Severity;
  readonly statements: string[];
}

/** Findings of the reduction: readings that contradict others or what is possible; one flag per unit and kind, or per wafer where they are many. */
export function readingRemarks(facts: LotFacts, rule: RuleOf<"reading_remarks">): Flag[] {
  const groups = new Map<string, Finding>();
  for (const { code, unit, statement } of facts.reduceRemarks) {
    const severity = rule.codes[code];
    if (severity === undefined) continue;
    const held = groups.get(`${code}|${unit}`) ?? { code, unit, severity, statements: [] };
    held.statements.push(statement);
    groups.set(`${code}|${unit}`, held);
  }
  const alike = Map.groupBy(
    groups.values(),
    (f) => `${f.code}|${scopeOf(f.unit).scope}|${scopeOf(f.unit).id}`,
  );
  return [...alike.values()].flatMap((own) =>
    own.length > MOST_SINGLE
      ? [doubted(facts, rule.rule, own)]
      : own.map((f) => doubted(facts, rule.rule, [f]))
  );
}

function doubted(facts: LotFacts, rule: string, findings: readonly Finding[]): Flag {
  const [{ code, unit, severity }] = findings as [Finding];
  const statements = findings.flatMap((f) => f.statements);
  const named = statements.flatMap((s) => refsIn(s, facts));
  const units = findings.map((f) => f.unit);
  const words = code.replaceAll("_", " ");
  const { id } = scopeOf(unit);
  return {
    ...scopeOf(unit),
    lot: facts.lot,
    rule,
    severity,
    brief: units.length === 1 ? `${unit}: ${words}` : `${words} on ${plural(units.length, "unit")}`,
    statement: units.length === 1
      ? joinedStatements(statements)
      : `${id}: ${words} on ${units.length} units, such as ${statements.slice(0, 3).join("; ")}; and ${
        plural(statements.length - 3, "more finding")
      }`,
    evidence: {
      numbers: { code, findings: statements.length },
      readings: mergeRefs(
        named.length > 0 ? named : findings.flatMap((f) => refsOfUnit(facts, f.unit, code)),
      ),
      ...(units.every((u) => u.split("/").length === 3) ? { guides: units } : {}),
    },
    suspects: [],
  };
}

/** Several findings about one unit, without telling its name each time. */
function joinedStatements(statements: readonly string[]): string {
  const [first, ...more] = statements;
  const head = /^.*?: /.exec(first!)?.[0] ?? "";
  const shown = more.slice(0, 5).map((s) => s.startsWith(head) ? s.slice(head.length) : s);
  const left = more.length - shown.length;
  return [first!, ...shown, ...(left > 0 ? [`and ${left} more`] : [])].join("; ");
}

const scopeOf = (unit: string): Pick<Flag, "scope" | "id"> =>
  unit.includes("|")
    ? { scope: "coating_run", id: unit.split("|", 1)[0]! }
    : { scope: "wafer", id: waferOf(unit) };

/** `readings/cutback.csv:36` in a sentence, as a reference. */
function refsIn(statement: string, facts: LotFacts): ReadingRef[] {
  return [...statement.matchAll(/\((readings\/[^():]+):(\d+)\)/g)].map(([, file_name, line]) => ({
    table: file_name!.replace(/^readings\//, "").replace(/[-.].*$/, ""),
    file_name: file_name!,
    source_file: facts.files.get(file_name!) ?? "",
    lines: [[Number(line), Number(line)] as const],
  }));
}

/** Where the sentence names no line: the readings of the unit's traits of that kind. */
function refsOfUnit(facts: LotFacts, unit: string, code: string): ReadingRef[] {
  const table = code.split("_", 1)[0]!;
  return facts.traits.filter((t) => t.unit === unit).flatMap((t) => t.readings).filter((r) =>
    r.table === table
  );
}

/** Dies that were cut and are not listed as unavailable. */
export function unlistedCut(facts: LotFacts, rule: RuleOf<"unlisted_cut">): Flag[] {
  const cut = new Map<string, string>();
  for (const { decisions } of facts.predictions) {
    for (const d of decisions) {
      if (d.unavailable !== null && !facts.design.unavailable.has(d.die_id)) cut.set(d.die_id, d.unavailable);
    }
  }
  const byWafer = Map.groupBy(cut, ([die]) => waferOf(die));
  return [...byWafer.values()].flatMap((dies) =>
    (dies.length > MOST_SINGLE ? [dies] : dies.map((d) => [d])).map((own) => cutFlag(facts, rule, own))
  );
}

function cutFlag(
  facts: LotFacts,
  rule: RuleOf<"unlisted_cut">,
  cut: readonly (readonly [die: string, why: string])[],
): Flag {
  const [die, why] = cut[0]!;
  const dies = cut.map(([d]) => d);
  const one = cut.length === 1;
  return {
    scope: "wafer",
    id: waferOf(die),
    lot: facts.lot,
    rule: rule.rule,
    severity: rule.severity,
    brief: one ? `die ${die} was cut and is not listed` : `${cut.length} dies were cut and are not listed`,
    statement: one
      ? `Die ${die}: ${why}, but lot.json does not list it as unavailable; it is not accepted for anything`
      : `Wafer ${
        waferOf(die)
      }: ${cut.length} dies were cut, such as ${die} (${why}), but lot.json does not list ` +
        `them as unavailable; they are not accepted for anything`,
    evidence: {
      numbers: { die: dies.join(", ") },
      readings: mergeRefs(
        facts.traits.filter((t) => t.die_id !== null && dies.includes(t.die_id)).flatMap((t) => t.readings)
          .filter((r) => r.table === "cutback"),
      ),
      dies,
    },
    suspects: [],
  };
}

/** Readings that the other readings of their trait contradict; each is told once, whatever rests on it. */
export function contradicted(facts: LotFacts, rule: RuleOf<"contradiction">): Flag[] {
  const found = new Map<string, ContradictionFact>();
  for (const c of inPlay(facts).flatMap((p) => p.analyses.contradictions)) {
    const wave = c.wavelength_nm === null ? "" : Math.round(c.wavelength_nm);
    const key = [c.trait, c.unit, wave, c.polarisation, c.process].join("|");
    const held = found.get(key);
    if (held === undefined || c.p < held.p) found.set(key, c);
  }
  return [...found.values()].map((c) => {
    const unit = unitOf(c.trait);
    const words = seriesWords({ ...c, trait: c.trait as TraitName });
    const lines = c.readings.map((r) => refText(r, 3));
    return {
      ...scopeOf(c.unit),
      lot: facts.lot,
      rule: rule.rule,
      severity: rule.severity,
      brief: `${c.unit}: its ${words} contradicts the other readings`,
      statement: `${c.unit}: its ${words} was read as ${num(c.value)}${unit} (${
        lines.slice(0, 3).join("; ")
      }${
        lines.length > 3 ? ` and ${lines.length - 3} more files` : ""
      }); the other readings lead one to expect ${num(c.expected)} ± ${num(c.u_expected, 2)}${unit}, ${
        num(Math.abs(c.standardised), 2)
      } times that u away (${pText(c.p)}); it stays in use until it is read again or taken out`,
      evidence: {
        numbers: {
          trait: c.trait,
          wavelength_nm: c.wavelength_nm,
          value: c.value,
          expected: c.expected,
          u_expected: c.u_expected,
          standardised: c.standardised,
          p_value: c.p,
        },
        readings: mergeRefs(c.readings),
        ...(c.unit.split("/").length === 3 ? { guides: [c.unit] } : {}),
      },
      suspects: [],
    };
  });
}

/** Rows that were kept aside. */
export function quarantined(facts: LotFacts, rule: RuleOf<"quarantine">): Flag[] {
  const { quarantine, rows, lot } = facts;
  if (quarantine.length === 0) return [];
  const byFile = new Map<string, number>();
  for (const q of quarantine) byFile.set(q.file_name, (byFile.get(q.file_name) ?? 0) + 1);
  const share = rows === 0 ? 1 : quarantine.length / rows;
  return [{
    scope: "lot",
    id: lot,
    lot,
    rule: rule.rule,
    severity: share > rule.watch_above_share ? "watch" : rule.severity,
    brief: `${quarantine.length} of ${plural(rows, "row")} kept aside`,
    statement: `Lot ${lot}: ${quarantine.length} of ${
      plural(rows, "row")
    } could not be used and are kept aside: ${
      [...byFile].map(([file, n]) => `${n} of ${file}`).join(", ")
    }; first: ${quarantine[0]!.reason} (line ${quarantine[0]!.source_line})`,
    evidence: {
      numbers: { quarantined: quarantine.length, rows, share },
      readings: mergeRefs(
        quarantine.map((q) => ({
          table: q.kind,
          file_name: q.file_name,
          source_file: q.source_file,
          lines: [[q.source_line, q.source_line]],
        })),
      ),
    },
    suspects: [],
  }];
}
