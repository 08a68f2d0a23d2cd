/**
 * Whether a guide fails its request for want of phase matching more often than for all else together. A draw without a match
 * meets no requirement that needs one, so the requirement least often met then only tells which of them is the strictest.
 * @param probability share of the draws that meet every requirement
 * @param matched share of the draws that match within the oven or the pump's range
 */
export const mostlyUnmatched = (probability: number, matched: number): boolean =>
  1 - matched > 0.5 * (1 - probability);

/** What then limits, in words. */
export const NO_MATCH = "phase matching";
