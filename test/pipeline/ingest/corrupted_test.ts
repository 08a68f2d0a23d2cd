import assert from "node:assert/strict";
import fc from "fast-check";
import { CUTBACK, ingestOne } from "./folder.ts";

const nasty = fc.constantFrom(
  "",
  "NaN",
  "1,5",
  '"',
  '""',
  "é",
  "-1",
  "1e400",
  "g99",
  "\r",
  "\n",
  ";",
  "__proto__",
  "0",
);
const good = fc.tuple(
  fc.constantFrom("K07-1"),
  fc.constantFrom("05", "06"),
  fc.constantFrom("g01", "g12", ""),
  fc.constantFrom("1550", "775.5"),
  fc.constantFrom("TE", "TM"),
  fc.constantFrom("20", "10.5"),
  fc.constantFrom("1.5", "0"),
);
/** A row with a few cells replaced, dropped or added; what stays good has to be accepted as it stands. */
const row = fc.tuple(good, fc.array(fc.tuple(fc.nat(7), fc.option(nasty)), { maxLength: 2 }))
  .map(([cells, changes]) => {
    const out: string[] = [...cells];
    for (const [at, value] of changes) value === null ? out.splice(at, 1) : out[at] = value;
    // Cells are quoted when they need it, so that the number of rows is known.
    const text = Array.from(
      out,
      (cell = "") => /[",\r\n]/.test(cell) ? `"${cell.replaceAll('"', '""')}"` : cell,
    );
    return {
      text: text.join(","),
      good: changes.length === 0,
      blank: out.every((cell) => (cell ?? "").trim() === ""),
    };
  });

Deno.test("accepted and quarantined add up to the rows, whatever happened to the file", async () => {
  await fc.assert(
    fc.asyncProperty(
      fc.array(row, { minLength: 1, maxLength: 30 }),
      fc.constantFrom("\n", "\r\n"),
      async (rows, end) => {
        const text = CUTBACK.trim() + end + rows.map((r) => r.text + end).join("");
        const { rows: accepted, quarantine, counts } = await ingestOne("cutback.csv", text)
          .catch((error) => {
            // Most numbers with a comma are a way of writing, not a slip.
            assert.match(error.message, /found decimal commas/);
            return { rows: [], quarantine: [], counts: null };
          });
        if (counts === null) return;
        const read = rows.filter((r) => !r.blank).length;
        assert.deepEqual(counts, [read, accepted.length, quarantine.length]);
        assert.equal(accepted.length + quarantine.length, read);
        assert.ok(accepted.length >= rows.filter((r) => r.good).length);
        const lines = [...accepted, ...quarantine].map((r) => Number(r["source_line"]));
        assert.equal(new Set(lines).size, read, "each row has a line of its own");
        for (const r of quarantine) {
          assert.ok(String(r["reason"]).length > 0 && String(r["wanted"]).length > 0, JSON.stringify(r));
        }
        for (const r of accepted) {
          assert.ok(Number(r["length_mm"]) > 0 && Number(r["insertion_loss_db"]) >= 0, JSON.stringify(r));
        }
      },
    ),
    { numRuns: 40, seed: 7 },
  );
});

Deno.test("bytes at random are taken in or refused by an InputError, never by another", async () => {
  await fc.assert(
    fc.asyncProperty(fc.uint8Array({ maxLength: 300 }), fc.boolean(), async (bytes, headed) => {
      const head = headed ? new TextEncoder().encode(CUTBACK) : new Uint8Array(0);
      const file = new Uint8Array([...head, ...bytes]);
      try {
        const { counts } = await ingestOne("cutback.csv", file);
        assert.equal(counts[0], counts[1] + counts[2]);
      } catch (error) {
        assert.equal((error as Error).name, "InputError", String((error as Error).stack));
      }
    }),
    { numRuns: 60, seed: 11 },
  );
});
