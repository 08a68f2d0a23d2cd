// Pure: no I/O, no clock, no hidden randomness.
import { randomFrom } from "../../../shared/random.ts";
import { checkShare } from "../tails.ts";
import { type Correction, correctPValues } from "./multiple_tests.ts";
import { type Block, shuffleTest } from "./shuffle.ts";

/** A wafer or die with what happened to it. */
export interface TracedUnit {
  readonly id: string;
  /** What it shares its fate with, smallest first: of a die its wafer and its lot, of a wafer its lot. May be empty. */
  readonly within: readonly string[];
  /**
   * Attribute → value, `"etch tool": "etcher-2"`. A missing attribute means that it does not apply; null that it is
   * not known.
   */
  readonly attributes: Readonly<Record<string, string | null>>;
}

export interface Attribute {
  readonly attribute: string;
  readonly value: string;
}

/** Things that carried an attribute wholly or not at all: single units, or the groups at a position of `within`. */
export interface Dealing {
  readonly by: "unit" | number;
  readonly carriers: number;
  readonly of: number;
}

export interface Suspect {
  /** More than one: they were carried by the very same units, and these data can't tell them apart. */
  readonly names: readonly Attribute[];
  readonly affectedWith: number;
  readonly affected: number;
  readonly unaffectedWith: number;
  readonly unaffected: number;
  /** What was compared, as wholes. */
  readonly dealings: readonly Dealing[];
  readonly pValue: number;
  readonly corrected: number;
  /** The smallest corrected p-value that the same design could have given. */
  readonly leastCorrected: number;
  readonly method: "exact" | "sampled";
  /** `no_power`: not even the clearest outcome would have reached the level; its innocence isn't shown either. */
  readonly verdict: "suspect" | "not_shown" | "no_power";
}

export interface SuspectReport {
  readonly level: number;
  readonly correction: Correction;
  /** Distinct hypotheses tried: what the correction counts. */
  readonly tried: number;
  /** Every hypothesis, likeliest suspect first. */
  readonly results: readonly Suspect[];
  /** Carried by every unit (whose value is known): nothing to compare with. */
  readonly uniform: readonly Attribute[];
  readonly remarks: readonly string[];
}

export interface SuspectOptions {
  /** Chance of any false blame; default 0.05. */
  readonly level?: number;
  /** Default Holm. */
  readonly correction?: Correction;
}

/**
 * Which steps, tools, recipes, batches or coating runs are over-represented among the affected units.
 *
 * Each value of each attribute is one hypothesis, tested one-sidedly. An attribute that whole wafers carry is dealt
 * among wafers, not dies: twelve bad dies of one wafer are one piece of evidence about the wafer's tool. What varies
 * inside a lot is compared inside the lot, so that a bad lot does not make a suspect of everything that is frequent
 * in it. For units that share their fate with no others this is Fisher's exact test. The tests assume that the
 * attribute was dealt without regard to anything else that matters.
 * @param attributes the attributes to look at; default all that occur
 * @throws RangeError for units with the same id, or that name different numbers of groups
 */
export function suspects(
  affected: readonly TracedUnit[],
  unaffected: readonly TracedUnit[],
  attributes?: readonly string[],
  options: SuspectOptions = {},
): SuspectReport {
  const level = options.level ?? 0.05;
  const correction = options.correction ?? "holm";
  checkShare(level, "level");
  const units = [...affected, ...unaffected];
  checkUnits(units);
  const base = { level, correction };
  if (affected.length === 0 || unaffected.length === 0) {
    const missing = affected.length === 0 ? "affected" : "unaffected";
    return {
      ...base,
      tried: 0,
      results: [],
      uniform: [],
      remarks: [`There is no ${missing} unit: nothing to compare`],
    };
  }
  const { hypotheses, uniform } = hypothesesOf(units, attributes);
  const tests = hypotheses.map((h) => {
    const blocks = blocksOf(units, h.column, affected.length);
    const seed = `suspects|${h.names.map((n) => `${n.attribute}=${n.value}`).join("|")}`;
    return { ...h, dealings: dealingsOf(blocks), test: shuffleTest(blocks, randomFrom(seed)) };
  });
  const p = tests.map((t) => t.test.p);
  const corrected = correctPValues(p, correction);
  const results = tests.map((t, i): Suspect => {
    const leastCorrected = correctPValues(p.map((x, k) => k === i ? t.test.least : x), correction)[i]!;
    const known = t.column.map((has, k) => ({ has, bad: k < affected.length })).filter((u) => u.has !== null);
    const count = (bad: boolean, any: boolean) => known.filter((u) => u.bad === bad && (any || u.has)).length;
    return {
      names: t.names,
      affectedWith: count(true, false),
      affected: count(true, true),
      unaffectedWith: count(false, false),
      unaffected: count(false, true),
      dealings: t.dealings,
      pValue: t.test.p,
      corrected: corrected[i]!,
      leastCorrected,
      method: t.test.method,
      verdict: corrected[i]! <= level ? "suspect" : leastCorrected > level ? "no_power" : "not_shown",
    };
  });
  results.sort((a, b) => a.pValue - b.pValue);
  return { ...base, tried: results.length, results, uniform, remarks: remarksOf(results) };
}

type Column = readonly (boolean | null)[];

/** Every value of every attribute as a column over the units; equal columns are one hypothesis with several names. */
function hypothesesOf(units: readonly TracedUnit[], wanted?: readonly string[]) {
  const names = wanted ?? [...new Set(units.flatMap((u) => Object.keys(u.attributes)))].sort();
  const byColumn = new Map<string, { names: Attribute[]; column: Column }>();
  const uniform: Attribute[] = [];
  for (const attribute of new Set(names)) {
    const held = units.map((u) =>
      Object.hasOwn(u.attributes, attribute) ? u.attributes[attribute]! : undefined
    );
    const values = new Set(held.filter((v) => v !== undefined && v !== null));
    for (const value of [...values].sort()) {
      const column = held.map((v) => v === null ? null : v === value);
      if (!column.includes(false)) {
        uniform.push({ attribute, value });
        continue;
      }
      const key = column.map((x) => x === null ? "?" : x ? "1" : "0").join("");
      const known = byColumn.get(key);
      if (known === undefined) byColumn.set(key, { names: [{ attribute, value }], column });
      else known.names.push({ attribute, value });
    }
  }
  return { hypotheses: [...byColumn.values()], uniform };
}

interface Dealt extends Block {
  readonly by: "unit" | number;
}

/**
 * What is dealt: the largest groups that carry a column wholly or not at all, each in the stratum of the mixed group
 * around it. A lot with both is compared inside itself, lots with one kind only are compared as wholes; each
 * contributes what it can say.
 */
function blocksOf(units: readonly TracedUnit[], column: Column, affected: number): Dealt[] {
  const known = units.map((unit, i) => ({ unit, has: column[i]!, bad: i < affected })).filter((m) =>
    m.has !== null
  );
  const blocks: Dealt[] = [];
  const open = [{ stratum: "", members: known, level: units[0]!.within.length - 1 }];
  for (let next = open.pop(); next !== undefined; next = open.pop()) {
    const { stratum, members, level } = next;
    const groups = new Map<string, typeof members>();
    for (const m of members) {
      const id = level < 0 ? m.unit.id : m.unit.within[level]!;
      const group = groups.get(id);
      if (group === undefined) groups.set(id, [m]);
      else group.push(m);
    }
    for (const [id, group] of groups) {
      const has = group[0]!.has;
      if (group.some((m) => m.has !== has)) {
        open.push({ stratum: `${level}/${id}`, members: group, level: level - 1 });
        continue;
      }
      const bad = group.filter((m) => m.bad).length;
      blocks.push({ units: group.length, affected: bad, has, stratum, by: level < 0 ? "unit" : level });
    }
  }
  return blocks;
}

/** Per size of what was dealt, how many and how many carriers; strata of one kind say nothing and don't count. */
function dealingsOf(blocks: readonly Dealt[]): Dealing[] {
  const mixed = new Set(blocks.filter((b) => b.has).map((b) => b.stratum));
  const others = new Set(blocks.filter((b) => !b.has).map((b) => b.stratum));
  const counts = new Map<"unit" | number, { carriers: number; of: number }>();
  for (const b of blocks) {
    if (!mixed.has(b.stratum) || !others.has(b.stratum)) continue;
    const count = counts.get(b.by) ?? { carriers: 0, of: 0 };
    count.of++;
    if (b.has) count.carriers++;
    counts.set(b.by, count);
  }
  return [...counts].map(([by, count]) => ({ by, ...count }));
}

function checkUnits(units: readonly TracedUnit[]): void {
  const ids = new Set<string>();
  const parents = new Map<string, string | undefined>();
  for (const u of units) {
    if (ids.has(u.id)) throw new RangeError(`Cannot look for suspects: unit "${u.id}" is named twice`);
    ids.add(u.id);
    if (u.within.length !== units[0]!.within.length) {
      throw new RangeError(
        `Cannot look for suspects: unit "${u.id}" lies within ${u.within.length} groups, others within ${
          units[0]!.within.length
        }`,
      );
    }
    for (const [level, group] of u.within.entries()) {
      const key = `${level}/${group}`;
      const parent = u.within[level + 1];
      if (parents.has(key) && parents.get(key) !== parent) {
        throw new RangeError(
          `Cannot look for suspects: group "${group}" lies within both "${parents.get(key)}" and "${parent}"`,
        );
      }
      parents.set(key, parent);
    }
  }
}

function remarksOf(results: readonly Suspect[]): string[] {
  const remarks: string[] = [];
  const name = (n: Attribute) => `${n.attribute} ${n.value}`;
  for (const r of results) {
    if (r.verdict !== "suspect" || r.names.length < 2) continue;
    remarks.push(`${r.names.map(name).join(", ")} can't be told apart: the same units carried them`);
  }
  const powerless = results.filter((r) => r.verdict === "no_power").length;
  if (powerless > 0) {
    remarks.push(
      `${powerless} of ${results.length} hypotheses could not have been shown by any outcome: too few carriers or others`,
    );
  }
  return remarks;
}
