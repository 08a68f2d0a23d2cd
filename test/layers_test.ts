import assert from "node:assert/strict";

/** Rooms, lowest first: a file may import from its own room and from those before it. */
const ROOMS = ["shared", "models", "pipeline"];
const IMPORT =
  /^\s*(?:import|export)\b[^"';]*?from\s*"([^"]+)"|^\s*import\s*"([^"]+)"|import\(\s*"([^"]+)"/gm;

async function* sources(folder: string): AsyncGenerator<string> {
  for await (const entry of Deno.readDir(folder)) {
    const path = `${folder}/${entry.name}`;
    if (entry.isDirectory) yield* sources(path);
    else if (entry.name.endsWith(".ts")) yield path;
  }
}

/** The room that an import of a file leads to, or null when it is a library. */
function roomOf(file: string, specifier: string): string | null {
  if (!specifier.startsWith(".")) return null;
  return new URL(specifier, `file:///${file}`).pathname.split("/")[1]!;
}

Deno.test({
  name: "imports go one way: pipeline to models to shared",
  permissions: { read: true },
  fn: async () => {
    let seen = 0;
    for (const [level, room] of ROOMS.entries()) {
      for await (const file of sources(room)) {
        const text = await Deno.readTextFile(file);
        for (const match of text.matchAll(IMPORT)) {
          const target = roomOf(file, (match[1] ?? match[2] ?? match[3])!);
          if (target === null || target === "deno.json") continue; // the program version stands there
          seen++;
          // The demo command writes the invented lots, whose generator stands with the other invented data.
          if (file.startsWith("pipeline/commands/demo") && target === "fixtures") continue;
          assert.ok(
            ROOMS.indexOf(target) >= 0 && ROOMS.indexOf(target) <= level,
            `${file} imports from ${target}/`,
          );
        }
      }
    }
    assert.ok(seen > 50, `found only ${seen} imports: the pattern no longer sees them`);
  },
});

Deno.test({
  name: "shared/ and models/ use no file, clock, console or unseeded random number",
  permissions: { read: true },
  fn: async () => {
    const banned =
      /\b(Deno\.|Date\.now|new Date\(\)|Math\.random|console\.|performance\.now|fetch\(|node:fs|node:os)/;
    for (const room of ["shared", "models"]) {
      for await (const file of sources(room)) {
        const text = await Deno.readTextFile(file);
        const found = banned.exec(text.replace(/^\s*(\/\/|\*|\/\*).*$/gm, ""));
        assert.equal(found, null, `${file} uses ${found?.[0]}`);
        assert.match(
          text,
          /^\/\/ Pure: no I\/O, no clock, no hidden randomness\./,
          `${file} does not state that it is pure`,
        );
      }
    }
  },
});

Deno.test({
  name: "stages do not call each other",
  permissions: { read: true },
  fn: async () => {
    const stages = ["ingest", "reduce", "predict", "query", "review"];
    for (const stage of stages) {
      for await (const file of sources(`pipeline/${stage}`)) {
        for (const match of (await Deno.readTextFile(file)).matchAll(IMPORT)) {
          const specifier = (match[1] ?? match[2] ?? match[3])!;
          if (!specifier.startsWith(".")) continue;
          const [, room, folder] = new URL(specifier, `file:///${file}`).pathname.split("/");
          const other = room === "pipeline" && stages.includes(folder!) && folder !== stage;
          assert.ok(!other, `${file} imports from stage ${folder}`);
        }
      }
    }
  },
});
