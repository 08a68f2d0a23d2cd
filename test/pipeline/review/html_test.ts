import { equal, ok } from "node:assert/strict";
import fc from "fast-check";
import { parseHTML } from "linkedom";
import { csvAddress, escapeHtml, html } from "../../../pipeline/review/html.ts";
import { shown, withU } from "../../../pipeline/review/numbers.ts";
import { foldedTable } from "../../../pipeline/review/table.ts";

Deno.test("what a template is given is text, in elements, attributes and headers alike", () => {
  const evil = `"><script>alert(1)</script><b title='`;
  const text = foldedTable({ caption: evil, file: "x", columns: [{ title: evil }], rows: [[evil]] }).text;
  ok(!/<script|<b title/.test(text), text);
  fc.assert(fc.property(fc.string({ unit: "grapheme" }), (s) => {
    const { document } = parseHTML(`<p title="${escapeHtml(s)}">${html`${s}`}</p>`) as unknown as {
      document: { querySelector(q: string): { textContent: string; getAttribute(n: string): string } };
    };
    const p = document.querySelector("p");
    const seen = s.replace(
      /(?![\t\n\r])[\p{Cc}\p{Cf}]/gu,
      (c) => `\\u${c.codePointAt(0)!.toString(16).padStart(4, "0")}`,
    );
    equal(p.textContent, seen);
    equal(p.getAttribute("title"), seen);
  }));
});

Deno.test("text that could turn a line around is shown as what it is", () => {
  equal(escapeHtml("K07\u202e/05"), "K07\\u202e/05");
  equal(html`${null}${undefined}${false}${[1, html`<i>2</i>`, "<"]}`.text, "1<i>2</i>&lt;");
});

Deno.test("a table's address gives back the bytes of its CSV", () => {
  fc.assert(fc.property(fc.string({ unit: "grapheme" }), (s) => {
    const address = csvAddress(s);
    ok(/^data:text\/csv;charset=utf-8,[ -~]*$/.test(address) && !/["'<>& ]/.test(address), address);
    equal(decodeURIComponent(address.slice(address.indexOf(",") + 1)), `\ufeff${s.toWellFormed()}`);
  }));
});

Deno.test("numbers are shown as they are, with as many digits as their u is worth", () => {
  equal(shown(0.000012345), "1.23 × 10⁻⁵");
  equal(shown(4067285), "4.07 × 10⁶");
  equal(shown(-0.5), "−0.5");
  equal(shown(1234, 4), "1234");
  equal(shown(NaN), "–");
  equal(withU(0.61234, 0.0213), "0.612 ± 0.021");
  equal(withU(4067285, 72699), "(4.067 ± 0.073) × 10⁶");
  equal(withU(51.7, 5.4), "51.7 ± 5.4");
  equal(withU(0.8, 0), "0.8");
  equal(withU(-12.34, 0.5), "−12.34 ± 0.50");
  equal(withU(null, null), "–");
});
