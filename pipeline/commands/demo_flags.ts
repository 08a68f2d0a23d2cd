import type { PlantedFault } from "../../fixtures/demo_lots.ts";
import type { Ledger } from "../ledger/mod.ts";
import { type Flag, loadRules } from "../query/flag/mod.ts";
import { flagsOfLot } from "./flag.ts";

/** Compares the flags of the demo's lots with what was planted in them. */
export class DemoFlags {
  readonly #flags = new Map<string, Promise<readonly Flag[]>>();

  constructor(readonly ledger: Ledger) {}

  /**
   * What the flags should say of a fault and don't: a fault of a step, a coating run or a mask group has to be flagged and
   * blamed, a contradictory reading to be named by file and line.
   */
  async missed(fault: PlantedFault): Promise<string[]> {
    const { step, scope, unit, lot } = fault;
    if (step !== undefined) {
      const own = (await this.#of(lot)).filter((f) => f.severity === "act" && f.id === unit);
      if (own.length === 0) return [`${scope} ${unit} is flagged`];
      const first = own.find((f) => f.suspects.length > 0)?.suspects[0];
      // What doesn't differ (one tool for both wafers) can't be blamed and isn't named.
      const fits = first?.step === step.step && (first.tool ?? step.tool) === step.tool &&
        (first.recipe ?? step.recipe) === step.recipe;
      return fits
        ? []
        : [`${unit} is blamed on ${step.step}; first suspect is ${first?.step ?? first?.name ?? "none"}`];
    }
    if (fault.id === "coating-off-target") {
      const own = (await this.#of(lot)).find((f) =>
        f.scope === "coating_run" && f.id === unit && f.severity === "act"
      );
      return own?.suspects[0]?.name?.startsWith(`${unit}|`)
        ? []
        : [`coating run ${unit} is flagged and blamed`];
    }
    if (fault.id === "period-slip") {
      const own = (await this.#of(lot)).find((f) =>
        f.suspects[0]?.kind === "group" && f.suspects[0].name === unit
      );
      return own === undefined ? [`group ${unit} is flagged as matching nothing`] : [];
    }
    const contradicted = fault.expect.find((e) => e.kind === "contradicted");
    if (contradicted !== undefined) {
      const { file, line } = contradicted;
      const told = (await this.#of(lot)).filter((f) => f.rule === "contradiction").map((f) =>
        f.evidence.readings.map((r) => `${r.file_name}:${r.lines.join()}`).join()
      );
      const at = `${file}:${line},${line}`;
      return told.length === 1 && told[0] === at ? [] : [`one flag names ${file}:${line}; named: ${told}`];
    }
    return [];
  }

  /** Flags to decide or look at in a lot that was made without a fault. */
  async falseAlarms(lot: string): Promise<string[]> {
    return (await this.#of(lot)).filter((f) => f.severity !== "note").map((f) => f.statement);
  }

  #of(lot: string): Promise<readonly Flag[]> {
    let held = this.#flags.get(lot);
    if (held === undefined) {
      held = loadRules().then((rules) => flagsOfLot(this.ledger, lot, null, rules, {})).then((found) =>
        found.flags
      );
      this.#flags.set(lot, held);
    }
    return held;
  }
}
