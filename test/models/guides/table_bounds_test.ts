import { doesNotThrow, throws } from "node:assert/strict";
import { checkTableBounds } from "../../../models/guides/mod.ts";

const AXES = { TE: "z", TM: "x" } as const;
const row = {
  wavelength_nm: 1550,
  polarisation: "TE" as const,
  temperature_c: 25,
  width_um: 1.4,
  n_eff: 1.9,
};

Deno.test("a film's n_eff lies between its substrate and the film, or the node is named with both limits", () => {
  doesNotThrow(() => checkTableBounds([row], "CLN", AXES, "silica"));
  // Silica 1.444 at 1550 nm (Malitson 1965), congruent n_e 2.138 (Jundt 1997).
  for (const n_eff of [1.44, 2.14]) {
    throws(
      () => checkTableBounds([row, { ...row, width_um: 1.6, n_eff }], "CLN", AXES, "silica"),
      {
        name: "RangeError",
        message:
          /found n_eff (1\.44|2\.14) at wavelength_nm 1550, polarisation TE, temperature_c 25, width_um 1\.6; .* the substrate's 1\.44\d+ and the film's 2\.13\d+/,
      },
    );
  }
  throws(() => checkTableBounds([row], "CLN", AXES, 1.95), /the substrate's 1\.95000/);
});

Deno.test("a diffused guide's n_eff lies above the crystal's, and not far", () => {
  const diffused = { ...row, n_eff: 2.1415 };
  doesNotThrow(() => checkTableBounds([diffused], "CLN", AXES, "crystal"));
  // Polarisations mixed up: the ordinary index is far above.
  throws(
    () => checkTableBounds([{ ...diffused, polarisation: "TM" }], "CLN", AXES, "crystal"),
    /the crystal's 2\.21/,
  );
  throws(() => checkTableBounds([{ ...diffused, n_eff: 2.4 }], "CLN", AXES, "crystal"), /0\.2 more/);
});

Deno.test("a table that does not say what it stands on is still held between air and a little above the crystal", () => {
  doesNotThrow(() => checkTableBounds([row, { ...row, n_eff: 2.2 }], "CLN", AXES, "unknown"));
  throws(
    () => checkTableBounds([{ ...row, n_eff: 0.99 }], "CLN", AXES, "unknown"),
    /between air's 1 and 0\.2 more/,
  );
  throws(() => checkTableBounds([{ ...row, n_eff: 2.35 }], "CLN", AXES, "unknown"), /the crystal's 2\.13\d+/);
});
