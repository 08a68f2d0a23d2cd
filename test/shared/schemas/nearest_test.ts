import assert from "node:assert/strict";
import { editDistance, nearestId, nearestWord } from "../../../shared/schemas/nearest.ts";

Deno.test("the edit distance counts inserts, deletions and replacements", () => {
  // kitten → sitting is 3: R. A. Wagner & M. J. Fischer's distance, the textbook case (from memory).
  const cases: [string, string, number][] = [["kitten", "sitting", 3], ["", "abc", 3], ["abc", "abc", 0], [
    "ab",
    "ba",
    2,
  ]];
  for (const [a, b, distance] of cases) {
    assert.equal(editDistance(a, b), distance);
    assert.equal(editDistance(b, a), distance);
  }
});

Deno.test("a word is near when only case, punctuation or a few letters differ", () => {
  const known = ["length_mm", "wavelength_nm", "insertion_loss_db"];
  assert.equal(nearestWord("Length (mm)", known), "length_mm");
  assert.equal(nearestWord("insertion_los_db", known), "insertion_loss_db");
  assert.equal(nearestWord("temperature", known), null);
  assert.equal(nearestWord("", known), null);
  assert.equal(nearestWord("***", known), null);
});

Deno.test("an id is suggested when zeros, case or the full form differ, and never when two fit", () => {
  const dies = ["05", "06", "15"];
  assert.deepEqual(["5", "005", "K07-1/05", "K07-1/5", "7"].map((id) => nearestId(id, dies)), [
    "05",
    "05",
    "05",
    "05",
    null,
  ]);
  assert.equal(nearestId("G1", ["g01", "g02"]), "g01");
  assert.equal(nearestId("5", ["05", "005"]), null);
  assert.equal(nearestId("guide-11", ["guide-1", "guide-2"]), "guide-1");
  assert.equal(nearestId("guide-3", ["guide-1", "guide-2"]), null); // one letter off both
});
