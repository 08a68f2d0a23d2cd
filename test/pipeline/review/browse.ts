// Opens pages in a headless browser and tells what it found, as JSON. Runs as a process of its own: the browser's driver asks for
// every permission, the tests have fewer.
import axe from "axe-core";
import { chromium, type Page } from "playwright-core";

/** What was found on one page in one setting. */
export interface Visit {
  readonly file: string;
  readonly setting: string;
  readonly consoleErrors: readonly string[];
  /** Requests for anything but the file itself and data that it holds. */
  readonly requests: readonly string[];
  readonly scrollWidth: number;
  readonly clientWidth: number;
  /** Violations that the checker calls serious or critical. */
  readonly violations: readonly string[];
  /** Hover texts of all pictures. */
  readonly titles: readonly string[];
  /** Smallest text in a picture as it is shown, px. */
  readonly smallestText: number;
}
export interface Printed {
  readonly file: string;
  readonly pages: number;
}

interface AxeResult {
  readonly violations: readonly {
    readonly id: string;
    readonly impact: string;
    readonly nodes: readonly { readonly html: string; readonly failureSummary: string }[];
  }[];
}

async function visit(page: Page, file: string, setting: string): Promise<Visit> {
  const consoleErrors: string[] = [];
  const requests: string[] = [];
  page.on("console", (m) => m.type() === "error" && consoleErrors.push(m.text()));
  page.on("pageerror", (e) => consoleErrors.push(e.message));
  page.on("request", (r) => {
    if (r.url() !== `file://${file}` && !r.url().startsWith("data:")) requests.push(r.url());
  });
  await page.goto(`file://${file}`);
  // Folded parts count, too, but for paper, on which they are left out.
  if (setting !== "print") {
    await page.evaluate("document.querySelectorAll('details').forEach((d) => d.open = true)");
  }
  await page.evaluate(axe.source);
  const result = await page.evaluate("axe.run(document, { resultTypes: ['violations'] })") as AxeResult;
  const measured = await page.evaluate(`({
    scrollWidth: document.documentElement.scrollWidth,
    clientWidth: document.documentElement.clientWidth,
    titles: [...document.querySelectorAll('svg title')].map((t) => t.textContent),
    smallestText: Math.min(...[...document.querySelectorAll('svg')].flatMap((s) =>
      s.querySelector('text') && s.getBoundingClientRect().width > 0
        ? [11 * s.getBoundingClientRect().width / s.viewBox.baseVal.width] : []))
  })`) as Pick<Visit, "scrollWidth" | "clientWidth" | "titles" | "smallestText">;
  return {
    file,
    setting,
    consoleErrors,
    requests,
    ...measured,
    violations: result.violations.filter((v) => v.impact === "serious" || v.impact === "critical")
      .map((v) =>
        `${v.id} (${v.impact}): ${v.nodes.length} places, first ${v.nodes[0]!.html.slice(0, 200)} — ${
          v.nodes[0]!.failureSummary.replaceAll("\n", " ").slice(0, 300)
        }`
      ),
  };
}

if (import.meta.main) {
  const [executablePath, ...files] = Deno.args;
  const browser = await chromium.launch({
    executablePath: executablePath!,
    args: [
      "--headless",
      "--no-sandbox",
      "--disable-gpu",
      "--disable-quic",
      "--no-first-run",
      "--disable-background-networking",
      "--disable-component-update",
      "--disable-sync",
    ],
  });
  const visits: Visit[] = [];
  const printed: Printed[] = [];
  try {
    for (const file of files) {
      const settings = [
        ["1280 light", 1280, "light", "screen"],
        ["1280 dark", 1280, "dark", "screen"],
        ["390 light", 390, "light", "screen"],
        ["print", 794, "light", "print"],
      ] as const;
      const seen = settings.map(async ([setting, width, colorScheme, media]) => {
        const page = await browser.newPage({ viewport: { width, height: 900 }, colorScheme });
        await page.emulateMedia({ media });
        const found = await visit(page, file, setting);
        await page.close();
        return found;
      });
      visits.push(...await Promise.all(seen));
      const page = await browser.newPage();
      await page.goto(`file://${file}`);
      const pdf = new TextDecoder("latin1").decode(
        await page.pdf({ preferCSSPageSize: true, printBackground: true }),
      );
      printed.push({ file, pages: pdf.match(/\/Type\s*\/Page(?!s)/g)?.length ?? 0 });
      await page.close();
    }
  } finally {
    await browser.close();
  }
  console.log(JSON.stringify({ visits, printed }));
}
