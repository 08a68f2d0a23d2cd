import assert from "node:assert/strict";
import { progressBar, useColour } from "../../../pipeline/console/mod.ts";

function recorder(isTerminal: boolean) {
  let text = "";
  return {
    isTerminal: () => isTerminal,
    writeSync(bytes: Uint8Array) {
      text += new TextDecoder().decode(bytes);
      return bytes.length;
    },
    get text() {
      return text;
    },
  };
}

Deno.test("a progress bar writes nothing where there is no terminal", () => {
  const output = recorder(false);
  {
    using bar = progressBar("reading", output);
    for (let i = 0; i <= 100; i++) bar.update(i, 100);
  }
  assert.equal(output.text, "");
});

Deno.test("on a terminal it is drawn now and then, always at the end, and wiped", () => {
  const output = recorder(true);
  let time = 0;
  {
    using bar = progressBar("reading", output, () => time);
    for (let i = 0; i <= 1000; i++) {
      bar.update(i, 1000);
      time += 1;
    }
  }
  const drawn = output.text.split("\r\x1b[K");
  assert.equal(drawn.length, 1 + Math.floor(1000 / 80) + 1 + 1 + 1, "first, every 80 ms, last, wiped");
  assert.equal(drawn.at(-1), "");
  assert.equal(drawn.at(-2), `reading  [${"=".repeat(23)}>]  1000/1000`);
  assert.equal(drawn[1], `reading  [${" ".repeat(24)}]  0/1000`);
});

Deno.test("a bar over nothing is drawn without dividing by it", () => {
  const output = recorder(true);
  progressBar("checking", output).update(0, 0);
  assert.match(output.text, /\[ {24}\] {2}0\/0$/);
});

Deno.test("colour needs a terminal, and NO_COLOR turns it off", () => {
  // Set to nothing counts as not set; undefined would ask the environment that the tests run in.
  assert.equal(useColour(true, ""), true);
  assert.equal(useColour(true, "1"), false);
  assert.equal(useColour(false, ""), false);
});
