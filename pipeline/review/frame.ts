import { type Html, Html as Raw, html } from "./html.ts";

const STYLE = Deno.readTextFileSync(new URL("./page.css", import.meta.url));

/** A whole page: nothing in it asks for anything outside itself, and the policy in its head forbids it to. */
export function page(title: string, body: Html, css = ""): string {
  return html`
    <!doctype html>
    <html lang="en">
      <head>
        <meta charset="utf-8">
        <meta name="viewport" content="width=device-width, initial-scale=1">
        <meta http-equiv="Content-Security-Policy"
          content="default-src 'none'; style-src 'unsafe-inline'; img-src data:">
        <meta name="color-scheme" content="light dark">
        <link rel="icon" href="data:,">
        <title>${title}</title>
        <style>
    ${new Raw(STYLE)}${new Raw(css)}</style>
      </head>
      <body>
    ${body}
      </body>
    </html>
  `.text.replace(/\s*\n\s*/g, "\n"); // the templates' indentation would be a third of a large page
}
