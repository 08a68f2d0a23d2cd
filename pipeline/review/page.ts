import type { ReviewData, ReviewFlag } from "../review_types.ts";
import { budgetSection, diesSection } from "./dies_section.ts";
import { flagsSection } from "./flags_section.ts";
import { page } from "./frame.ts";
import { capabilitySection } from "./capability_section.ts";
import { gainsSection } from "./gains_section.ts";
import { type Html, html } from "./html.ts";
import { mapsSection } from "./maps_section.ts";
import { coverageSection, methodSection, recordsSection } from "./records_section.ts";
import { chartsSection, yieldsSection } from "./yields_section.ts";

/** The review of a lot as one page that needs nothing else: no network, no script. */
export function reviewPage(data: ReviewData): string {
  const sections: [id: string, title: string, body: Html][] = [
    ["flags", "What is out of line", flagsSection(data)],
    ["maps", "Where on the wafer", mapsSection(data)],
    ["yields", "Yields", yieldsSection(data)],
    ["gains", "What would pay off", gainsSection(data)],
    ["charts", "Over the lots", chartsSection(data)],
    ["capability", "Capability", capabilitySection(data.capabilities)],
    ["dies", "Which dies go where", diesSection(data)],
    ["budget", "Heralding budget", budgetSection(data)],
    ["coverage", "What was read, and what is inferred", coverageSection(data)],
    ["records", "Records, readings kept aside, remarks", recordsSection(data)],
    ["method", "Method, versions, cautions", methodSection(data)],
  ];
  const kept = sections.filter(([, , body]) => body.text !== "");
  return page(
    `Review of lot ${data.lot}`,
    html`
      <a class="skip" href="#main">Skip to the answers</a>
      <header>
        <h1>Review of lot ${data.lot}</h1>
        <p class="soft">Platform ${data.platform}${data.started === null
          ? ""
          : `, started ${data.started}`}. ${data.provenance.program}, model ${data.provenance.model}.</p>
        <nav aria-label="Sections">
          <ul>${kept.map(([id, title]) => html`<li><a href="#${id}">${title}</a></li>`)}</ul>
        </nav>
      </header>
      <main id="main">
      ${firstScreen(data)}
      ${kept.map(([id, title, body]) =>
        html`
          <section id="${id}"
            aria-labelledby="${id}-title"><h2 id="${id}-title">${title}</h2>${body}</section>
        `
      )}
      </main>
    `,
  );
}

function firstScreen({ counts, answers, flags }: ReviewData): Html {
  const of = (s: ReviewFlag["severity"]) => flags.filter((f) => f.severity === s).length;
  const numbers: [number, string][] = [
    [counts.wafers, counts.wafers === 1 ? "wafer" : "wafers"],
    [counts.dies, `dies, ${counts.unavailable} can't be shipped`],
    [counts.guides, "guides"],
    [of("act"), "to decide"],
    [of("watch"), "to look at"],
    [counts.quarantined, `of ${counts.rows} rows kept aside`],
  ];
  const cards: [string, readonly string[]][] = [
    ["How did this lot do?", answers.how],
    ["What is out?", answers.out],
    ["What is behind it?", answers.behind],
    ["What would pay off most?", answers.pay_off],
    ["Which dies go where?", answers.goes],
  ];
  return html`<ul class="counts">${numbers.map(([n, what]) => html`<li><b>${n}</b> ${what}</li>`)}</ul>
<div class="answers">${
    cards.map(([title, lines], k) =>
      html`
        <section aria-labelledby="answer-${k}">
          <h2 id="answer-${k}">${title}</h2>
          <ul>${lines.map((l) => html`<li>${l}</li>`)}</ul>
        </section>
      `
    )
  }</div>`;
}
