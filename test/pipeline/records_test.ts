import { deepEqual, equal, rejects } from "node:assert/strict";
import { loadDesign, lotsOf, recordsOf } from "../../pipeline/records.ts";
import { GUIDES, LOT, Scene } from "./ingest/folder.ts";

Deno.test("a lot's design: guides in the order of their ids, the coating that counts, what is unavailable", async () => {
  await using scene = await Scene.make({
    "lot.json": {
      ...LOT,
      coatings: [
        { coating_run: "C1", facet: "out", dies: ["K07-1/05", "K07-1/06"] },
        { coating_run: "C3", facet: "in", dies: ["K07-1/05"] },
        { coating_run: "C2", facet: "out", dies: ["K07-1/05"] },
      ],
      unavailable: [{ die: "K07-1/06", reason: "cracked" }],
    },
    "guides.csv": GUIDES.replaceAll("g02", "g2").replaceAll("g12", "g10"),
  });
  await scene.ingest();
  const ledger = await scene.ledger();
  deepEqual(await lotsOf(ledger), ["K07"]);
  const design = await loadDesign(ledger, "K07");
  deepEqual(
    design.guides.map((g) => g.guide_id),
    ["05", "06"].flatMap((d) => ["g01", "g2", "g10"].map((g) => `K07-1/${d}/${g}`)),
  );
  deepEqual([...design.guidesOfDie.keys()], ["K07-1/05", "K07-1/06"]);
  equal(design.guidesOfDie.get("K07-1/06")!.length, 3);
  equal(design.guideById.get("K07-1/05/g10")!.period_um, 9.1);
  deepEqual([...design.coatingOf].map(([key, c]) => [key, c.coating_run]).sort(), [
    ["K07-1/05|in", "C3"],
    ["K07-1/05|out", "C2"],
    ["K07-1/06|out", "C1"],
  ]);
  deepEqual([...design.unavailable].map(([die, u]) => [die, u.reason]), [["K07-1/06", "cracked"]]);
  await rejects(loadDesign(ledger, "K08"), /Unknown lot "K08": the ledger .* holds K07/);
});

Deno.test("records are the rows in force, with their file and line, empty cells as null", async () => {
  const head = "wafer,die,guide,wavelength_nm,polarisation,length_mm,insertion_loss_db,u_insertion_loss_db\n";
  await using scene = await Scene.make({
    "readings/cutback.csv":
      `${head}K07-1,05,g01,1550,TE,20,3,0.1\nK07-1,05,g01,1550,TE,10,oops,0.1\nK07-1,05,,1550,TE,10,2.5,\n`,
  });
  await scene.ingest();
  const ledger = await scene.ledger();
  const rows = async () =>
    (await recordsOf(ledger, "cutback", "K07")).map((r) => [
      r.scope,
      r.unit,
      r.guide_id,
      r.insertion_loss_db,
      r.u_insertion_loss_db,
      r.source_line,
    ]);
  deepEqual(await rows(), [
    ["guide", "K07-1/05/g01", "K07-1/05/g01", 3, 0.1, 2],
    ["die", "K07-1/05", null, 2.5, null, 4],
  ]);
  await scene.write({ "readings/cutback.csv": `${head}K07-1,05,g01,1550,TE,20,3.5,0.1\n` });
  await scene.ingest();
  deepEqual(await rows(), [["guide", "K07-1/05/g01", "K07-1/05/g01", 3.5, 0.1, 2]]);
  deepEqual(await recordsOf(ledger, "fringes", "K07"), []);
});
