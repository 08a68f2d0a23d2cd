import type { Basis } from "../shared/vocabulary.ts";

/** What a factor of the heralding budget rests on, as people are told: the detectors are those that the request states. */
export const budgetBasis = (factor: string, { basis }: { readonly basis: Basis }): Basis | "request" =>
  factor === "detector" ? "request" : basis;
