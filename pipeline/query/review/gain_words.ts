import type { GainReview } from "../../review_types.ts";
import { plural } from "../flag/types.ts";

/** The largest rise of a lot's yield with traits at target, in words. */
export function gainWords(g: GainReview): string {
  const whole = g.all_at_target - g.as_made;
  const [first, ...more] = g.groups;
  if (g.as_made === g.dies) return "every die that can be shipped is accepted as made";
  if (whole === 0 && (first === undefined || first.dies <= 0)) {
    return "no trait at its target would bring one more die";
  }
  const all = `all traits at target bring ${whole} (${g.all_at_target} of ${g.dies})`;
  if (first === undefined || first.dies <= 0) {
    return `no single trait at its target would bring one more die, ${all}: several have to be put right together`;
  }
  const alike = more.filter((m) => m.dies === first.dies).map((m) => m.words);
  const count = g.interaction * g.dies;
  const together = Math.abs(count) < 0.5
    ? ""
    : count > 0
    ? `; ${plural(Math.round(count), "die")} of these only with several put right together`
    : `; the single rises overlap by ${plural(Math.round(-count), "die")}`;
  return `${first.words} at target would bring ${plural(first.dies, "more die")} (${
    g.as_made + first.dies
  } instead of ${g.as_made} of ${g.dies}), ${
    alike.length > 0 ? `as many as ${alike.join(", ")}` : "the largest single rise"
  }; ${all}${together}`;
}
