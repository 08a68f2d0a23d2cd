import assert from "node:assert/strict";
import { restoreOne } from "../../../models/decision/restore_one.ts";
import { assertClose } from "../../assert_close.ts";

Deno.test("restoreOne() shows what single rises leave over as interaction", () => {
  // Both traits must be right: 0.5 · 0.4 as made, one restored 0.4 or 0.5, both 1.
  const found = restoreOne({
    asMade: 0.2,
    allAtTarget: 1,
    oneAtTarget: [{ trait: "duty", yield: 0.4 }, { trait: "loss", yield: 0.5 }],
  });
  assert.deepEqual(found.traits.map((t) => t.trait), ["loss", "duty"]);
  assertClose(found.traits[0]!.rise, 0.3, { rel: 1e-12 });
  assertClose(found.interaction, 0.3, { rel: 1e-12 });
  const shares = found.traits.reduce((s, t) => s + t.share!, 0) + found.interactionShare!;
  assertClose(shares, 1, { rel: 1e-12 });
});

Deno.test("restoreOne() gives a negative interaction where either would do", () => {
  const found = restoreOne({
    asMade: 0.2,
    allAtTarget: 0.9,
    oneAtTarget: [{ trait: "a", yield: 0.9 }, { trait: "b", yield: 0.9 }, { trait: "c", yield: 0.1 }],
  });
  assertClose(found.interaction, 0.7 - 0.7 - 0.7 + 0.1, { rel: 1e-12 });
  assert.deepEqual(found.traits.map((t) => t.trait), ["a", "b", "c"]);
  assertClose(found.traits[2]!.rise, -0.1, { rel: 1e-12 });
});

Deno.test("restoreOne() has no shares where nothing rises, and refuses what is no yield", () => {
  const flat = restoreOne({ asMade: 1, allAtTarget: 1, oneAtTarget: [{ trait: "a", yield: 1 }] });
  assert.deepEqual([flat.interaction, flat.interactionShare, flat.traits[0]!.share], [0, null, null]);
  assert.throws(() => restoreOne({ asMade: 0.2, allAtTarget: 40, oneAtTarget: [] }), RangeError);
});
