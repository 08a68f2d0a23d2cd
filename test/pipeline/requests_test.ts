import assert from "node:assert/strict";
import { loadRequestFile } from "../../pipeline/requests.ts";
import { InputError } from "../../shared/errors.ts";

async function load(spectrum: string) {
  const folder = await Deno.makeTempDir();
  try {
    await Deno.writeTextFile(`${folder}/pump.csv`, spectrum);
    await Deno.writeTextFile(
      `${folder}/r.json`,
      JSON.stringify({
        request: "r",
        process: "pair-generation",
        polarisations: { pump: "TE", signal: "TE", idler: "TM" },
        pump: {
          wavelength_nm: 791,
          shape: "spectrum",
          spectrum: "pump.csv",
          average_power_mw: 0.1,
          repetition_mhz: 76,
        },
        signal: { wavelength_nm: 1582 },
        oven_c: [20, 90],
      }),
    );
    return await loadRequestFile(`${folder}/r.json`);
  } finally {
    await Deno.remove(folder, { recursive: true });
  }
}

const refused = (spectrum: string, why: RegExp) =>
  assert.rejects(load(spectrum), (e: Error) => e instanceof InputError && why.test(e.message));

Deno.test("a pump spectrum is read in order of wavelength", async () => {
  const { spectrum } = await load("wavelength_nm,intensity\n792,0\n791,1\n790,0\n");
  assert.deepEqual([...spectrum!.intensity], [0, 1, 0]);
  assert.ok(spectrum!.lambda[0]! < spectrum!.lambda[2]!);
});

Deno.test("a pump spectrum that does not hold the pump is refused, as is one in other units", async () => {
  await refused("wavelength_nm,intensity\n799,0\n800,1\n801,0\n", /from 799 to 801 nm, .* 791 nm inside/);
  await refused("wavelength_nm,intensity\n0.79,0\n0.791,1\n0.792,0\n", /791 nm inside/);
});

Deno.test("a pump spectrum with one wavelength twice is refused", async () => {
  await refused("wavelength_nm,intensity\n790,0\n791,1\n791,2\n792,0\n", /791 nm stands there twice/);
});
