import { quoteValue } from "../../shared/errors.ts";
import { dieId, guideId } from "../../shared/ids.ts";
import { nearestId } from "../../shared/schemas/nearest.ts";
import type { GuideRow } from "../../shared/schemas/guides.ts";
import type { Problem } from "./issues.ts";

/** A guide as designed, as far as readings are checked against it. */
export interface KnownGuide {
  readonly index: number;
  readonly id: string;
  readonly die: string;
  readonly length_mm: number;
}

/** The thing that a reading belongs to. */
export interface Owner {
  readonly scope: "guide" | "die" | "wafer";
  /** Full id of the guide, die or wafer. */
  readonly unit: string;
  readonly die: string | null;
  readonly guide: KnownGuide | null;
  /** Length of the guide, or of the longest one on the die or wafer, mm. */
  readonly length_mm: number;
}

/** So many unknown ids get a suggestion: the search compares with all known ones, and a file may be wrong throughout. */
const SUGGESTIONS = 1000;

/** Wafers of lot.json, and dies and guides of guides.csv: which readings may name. */
export class KnownIds {
  readonly #guides = new Map<string, KnownGuide>();
  readonly #dieNames = new Map<string, string[]>(); // wafer → names of its dies
  readonly #guideNames = new Map<string, string[]>(); // full die id → names of its guides
  readonly #longest = new Map<string, number>(); // die or wafer → mm
  readonly #suggested = new Map<string, string | null>();
  #last: { wafer: string; die: string | null; guide: string | null; owner: Owner | Problem } | null = null;
  #lastProbable: { ids: string; guide: KnownGuide | null } | null = null;

  constructor(readonly wafers: readonly string[]) {}

  /** Takes a row of guides.csv in. A problem if the wafer is unknown or the guide is there already. */
  addGuide(row: GuideRow): Problem | null {
    if (!this.wafers.includes(row.wafer)) return this.#unknownWafer(row.wafer);
    this.nameDie(row.wafer, row.die);
    const id = guideId(row.wafer, row.die, row.guide);
    if (this.#guides.has(id)) {
      return {
        column: "guide",
        value: row.guide,
        reason: `guide ${id} is listed before`,
        wanted: "each guide once; the first row counts",
      };
    }
    const die = dieId(row.wafer, row.die);
    this.#guides.set(id, { index: this.#guides.size, id, die, length_mm: row.length_mm });
    append(this.#guideNames, die, row.guide);
    for (const unit of [die, row.wafer]) {
      this.#longest.set(unit, Math.max(row.length_mm, this.#longest.get(unit) ?? 0));
    }
    this.#suggested.clear();
    this.#last = null;
    this.#lastProbable = null;
    return null;
  }

  /** Notes that guides.csv names a die, also when the row itself cannot be used. */
  nameDie(wafer: string, die: string): void {
    const names = this.#dieNames.get(wafer);
    if (names === undefined) this.#dieNames.set(wafer, [die]);
    else if (names.at(-1) !== die && !names.includes(die)) names.push(die);
  }

  get guideCount(): number {
    return this.#guides.size;
  }

  guide(id: string): KnownGuide | undefined {
    return this.#guides.get(id);
  }

  guides(): Iterable<KnownGuide> {
    return this.#guides.values();
  }

  /** Whether guides.csv names this die (full id); if not, the one that was probably meant. */
  hasDie(id: string): { known: boolean; nearest: string | null } {
    const [wafer, die] = [id.slice(0, id.indexOf("/")), id.slice(id.indexOf("/") + 1)];
    const names = this.#dieNames.get(wafer) ?? [];
    if (names.includes(die)) return { known: true, nearest: null };
    const near = nearestId(die, names);
    return { known: false, nearest: near === null ? null : dieId(wafer, near) };
  }

  /** Full ids of all dies, in the order of guides.csv. */
  dies(): string[] {
    return [...this.#guideNames.keys()];
  }

  guidesOnDie(die: string): number {
    return this.#guideNames.get(die)?.length ?? 0;
  }

  /** The owner of a reading from its three cells, or what is wrong with them. */
  owner(wafer: string, die: string | null, guide: string | null): Owner | Problem {
    const last = this.#last;
    if (last !== null && last.guide === guide && last.die === die && last.wafer === wafer) return last.owner;
    const owner = this.#find(wafer, die, guide);
    this.#last = { wafer, die, guide, owner };
    return owner;
  }

  #find(wafer: string, die: string | null, guide: string | null): Owner | Problem {
    if (!this.wafers.includes(wafer)) return this.#unknownWafer(wafer);
    if (die === null) {
      if (guide !== null) {
        return {
          column: "die",
          value: "",
          reason: `the row names guide ${quoteValue(guide)} and no die`,
          wanted: "the guide's die, or both empty for a reading of the whole wafer",
        };
      }
      const length_mm = this.#longest.get(wafer) ?? Infinity;
      return { scope: "wafer", unit: wafer, die: null, guide: null, length_mm };
    }
    const full = dieId(wafer, die);
    if (guide === null) {
      if (!this.#dieNames.get(wafer)?.includes(die)) return this.#unknownDie(wafer, die);
      const length_mm = this.#longest.get(full) ?? Infinity;
      return { scope: "die", unit: full, die: full, guide: null, length_mm };
    }
    const known = this.#guides.get(guideId(wafer, die, guide));
    if (known !== undefined) {
      return { scope: "guide", unit: known.id, die: full, guide: known, length_mm: known.length_mm };
    }
    if (!this.#dieNames.get(wafer)?.includes(die)) return this.#unknownDie(wafer, die);
    return this.#unknown("guide", `die ${full}`, guide, this.#guideNames.get(full) ?? []);
  }

  /** The guide that three cells name, or that they were probably meant to name; null when that cannot be told. */
  probableGuide(wafer: string, die: string, guide: string): KnownGuide | null {
    const known = this.#guides.get(guideId(wafer, die, guide));
    if (known !== undefined) return known;
    const ids = JSON.stringify([wafer, die, guide]);
    if (this.#lastProbable?.ids !== ids) this.#lastProbable = { ids, guide: this.#meant(wafer, die, guide) };
    return this.#lastProbable.guide;
  }

  #meant(wafer: string, die: string, guide: string): KnownGuide | null {
    const meant = (found: string, ids: readonly string[]) =>
      ids.includes(found) ? found : nearestId(found, ids);
    const w = meant(wafer, this.wafers);
    const d = w === null ? null : meant(die, this.#dieNames.get(w) ?? []);
    const g = d === null ? null : meant(guide, this.#guideNames.get(dieId(w!, d)) ?? []);
    return g === null ? null : this.#guides.get(guideId(w!, d!, g)) ?? null;
  }

  #unknownWafer(wafer: string): Problem {
    return this.#unknown("wafer", "lot.json", wafer, this.wafers);
  }

  #unknownDie(wafer: string, die: string): Problem {
    return this.#unknown("die", `wafer ${wafer}`, die, this.#dieNames.get(wafer) ?? []);
  }

  #unknown(column: string, of: string, found: string, known: readonly string[]): Problem {
    const key = `${column}\n${of}\n${found}`;
    let suggestion = this.#suggested.get(key);
    if (suggestion === undefined) {
      suggestion = this.#suggested.size < SUGGESTIONS ? nearestId(found, known) : null;
      if (this.#suggested.size < SUGGESTIONS) this.#suggested.set(key, suggestion);
    }
    const list = known.length === 0 ? "none" : known.slice(0, 8).join(", ") + (known.length > 8 ? " …" : "");
    return {
      column,
      value: found,
      reason: `${of} has no ${column} ${quoteValue(found)}`,
      wanted: suggestion === null ? `one of its ${column} ids (text): ${list}` : quoteValue(suggestion),
    };
  }
}

function append(map: Map<string, string[]>, key: string, value: string): void {
  const list = map.get(key);
  if (list === undefined) map.set(key, [value]);
  else list.push(value);
}
