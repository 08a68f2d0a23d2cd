import normalCdf from "@stdlib/stats-base-dists-normal-cdf";
import { lowerQuantile } from "../../../models/pooling/mod.ts";
import { assertClose } from "../../assert_close.ts";

Deno.test("lowerQuantile() inverts the cumulative normal down to 36 standard deviations", () => {
  for (const z of [-36, -20, -12, -9, -8.2, -7, -5, -4.8, -3, -1, 0, 1, 2]) {
    assertClose(lowerQuantile(normalCdf(z, 0, 1)), z, { rel: 1e-9, abs: 1e-9 }, `z = ${z}`);
  }
});

Deno.test("lowerQuantile() meets the library's quantile where it takes over", () => {
  // Normal quantile at 1e−6: −4.753424308822899 (tables of the normal distribution).
  for (const p of [0.999999e-6, 1e-6, 1.000001e-6]) {
    assertClose(lowerQuantile(p), -4.753424308822899, { rel: 1e-6 });
  }
});
