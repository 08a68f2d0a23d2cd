import * as Plot from "@observablehq/plot";
import { parseHTML } from "linkedom";
import { Html, html } from "./html.ts";

/** As much of a document as is used here; the types of a browser are not those of this program. */
interface Drawn {
  readonly tagName: string;
  readonly outerHTML: string;
  setAttribute(name: string, value: string): void;
  querySelectorAll(selector: string): Iterable<{ removeAttribute(name: string): void }>;
}

const { document } = parseHTML("<!doctype html><html><body></body></html>") as unknown as { document: never };

/**
 * A chart as SVG text. To a screen reader it is one picture with a name; what it shows stands in the table beside it. Hover texts
 * are SVG titles, which need no script.
 */
export function chart(label: string, options: Plot.PlotOptions): Html {
  const svg = Plot.plot({
    ...options,
    document,
    ariaLabel: label,
    style: { fontSize: "13px", ...(options.style as Record<string, string> | undefined) },
  }) as unknown as Drawn;
  if (svg.tagName.toLowerCase() !== "svg") {
    throw new TypeError("Cannot draw the chart: a legend needs its own picture");
  }
  svg.setAttribute("role", "img");
  // Inside a picture nothing has a name of its own.
  for (const part of [...svg.querySelectorAll("[aria-label],[aria-hidden]")]) {
    part.removeAttribute("aria-label");
    part.removeAttribute("aria-hidden");
  }
  return new Html(tidied(svg.outerHTML));
}

const PLACES = /\s(?:d|transform|x|y|x1|x2|y1|y2|cx|cy|r|width|height)="[^"]*"/g;

/**
 * The style that the library puts into every chart stands once in the page; places on the picture need no 14 digits. Only
 * places are cut: a text must keep its digits.
 */
function tidied(svg: string): string {
  return svg.replace(/<style>[\s\S]*?<\/style>/, "").replaceAll(/ class="plot-\w+"/g, "")
    .replace(PLACES, (place) => place.replace(/(\d+\.\d)\d+/g, "$1"));
}

/** A picture with its caption and what belongs under it. */
export function figure(
  caption: string,
  picture: Html | readonly Html[],
  below: Html | readonly Html[] = [],
): Html {
  return html`<figure>${picture}<figcaption>${caption}</figcaption>${below}</figure>`;
}

export { Plot };
