// Pure: no I/O, no clock, no hidden randomness.
import { z } from "zod";

/** Longest id of a wafer, die, guide … in characters. */
export const LONGEST_ID = 100;

/** Text, with a word for who writes a number: ids are text. */
const idText = () =>
  z.string({
    error: ({ input }) =>
      input === undefined ? "the key is missing; need text" : "need text in quotes, as ids are text",
  });

/**
 * A name of a thing: text, also when it looks like a number. `/` is kept for full ids (`K07-1/05/g12`); control characters
 * and blanks at the ends would make two ids look the same.
 */
export const idSchema = idText().min(1).max(LONGEST_ID).regex(
  /^(?!\s)[^/\\\p{Cc}\p{Cf}\p{Zl}\p{Zp}]*(?<!\s)$/u,
  "need an id without / or \\, control characters and blanks at the ends",
).describe(`an id: text of 1…${LONGEST_ID} characters without / and \\`);

/** A lot or platform id: it becomes part of file names, so letters, digits and . _ - only, and no dot in front. */
export const nameSchema = idText().max(64).regex(
  /^[\p{L}\p{N}_][\p{L}\p{N}._-]*$/u,
  "need 1…64 letters, digits, or . _ -, not beginning with . or -",
).describe("1…64 letters, digits, or . _ -, not beginning with . or -");

/** Full die id, `K07-1/05`. */
export const dieIdSchema = idText().regex(
  /^[^/\\\p{Cc}]+\/[^/\\\p{Cc}]+$/u,
  'need a full die id such as "K07-1/05"',
).describe('a full die id such as "K07-1/05"');

/** ISO 8601 date, or date and time with or without an offset from UTC. */
export const momentSchema = z.union([
  z.iso.datetime({ offset: true, local: true }),
  z.iso.date(),
], { error: 'need an ISO 8601 date or time such as "2026-09-15T10:20:00Z"' })
  .describe('an ISO 8601 date or time such as "2026-09-15T10:20:00Z"');
