import assert from "node:assert/strict";
import { mostlyUnmatched } from "../../../pipeline/query/limits.ts";

Deno.test("mostlyUnmatched() tells a guide that fails for want of a match from one that fails though it matches", () => {
  // 9 of 10 draws have no match: of the 94 % that fail, these are nearly all.
  assert.equal(mostlyUnmatched(0.055, 0.1), true);
  assert.equal(mostlyUnmatched(0, 0), true);
  // Three quarters match, and most of them fail for something else.
  assert.equal(mostlyUnmatched(0.2, 0.75), false);
  assert.equal(mostlyUnmatched(1, 1), false);
});
