import { InputError } from "../../shared/errors.ts";

/** A line longer than this is kept out of the parser. */
export const LONGEST_LINE_BYTES = 1 << 20;
const CHUNK_BYTES = 1 << 17;
const LINE_FEED = 10;

/** A part of a text file: whole lines, line ends `\n`. */
export interface TextPart {
  readonly text: string;
  /** Physical line (from 1) that the text begins on. */
  readonly line: number;
  /** Set instead of a line that was too long: how it begins. The text is then one empty line in its place. */
  readonly tooLong?: string;
}

/**
 * Streams a text file as whole lines. Memory stays at one chunk plus one line, whatever the file. A byte order mark is
 * dropped, Windows line ends become `\n`, an over-long line is cut out and handed on as such.
 * @param name the file as the user knows it, for messages
 * @throws InputError naming the line when the bytes are no UTF-8, or lines end in a lone carriage return
 */
export async function* streamText(path: string, name: string): AsyncGenerator<TextPart> {
  using file = await Deno.open(path, { read: true });
  const state = { line: 1, first: true };
  let carry: Uint8Array = new Uint8Array(0);
  let overlong: string | null = null;
  const buffer = new Uint8Array(CHUNK_BYTES);
  for (let n = await file.read(buffer); n !== null; n = await file.read(buffer)) {
    let chunk = buffer.subarray(0, n);
    if (overlong !== null) {
      const end = chunk.indexOf(LINE_FEED);
      if (end < 0) continue;
      yield { text: "\n", line: state.line++, tooLong: overlong };
      overlong = null;
      chunk = chunk.subarray(end + 1);
    }
    const last = chunk.lastIndexOf(LINE_FEED);
    if (last >= 0) {
      yield decode(joined(carry, chunk.subarray(0, last + 1)), name, state);
      carry = chunk.slice(last + 1);
    } else {
      carry = joined(carry, chunk);
      if (carry.length > LONGEST_LINE_BYTES) {
        overlong = sample(carry);
        carry = new Uint8Array(0);
      }
    }
  }
  if (overlong !== null) yield { text: "\n", line: state.line, tooLong: overlong };
  else if (carry.length > 0) yield decode(carry, name, state);
}

function decode(bytes: Uint8Array, name: string, state: { line: number; first: boolean }): TextPart {
  const line = state.line;
  let text: string;
  try {
    // Only whole lines are decoded, so a character never straddles two calls; the mark counts at the very start only.
    text = new TextDecoder("utf-8", { fatal: true, ignoreBOM: !state.first }).decode(bytes);
  } catch (cause) {
    throw notUtf8(bytes, name, state, cause);
  }
  state.line += countLineFeeds(bytes);
  state.first = false;
  if (text.includes("\r")) {
    text = text.replaceAll("\r\n", "\n");
    if (text.includes("\r") && !text.includes("\n")) {
      throw new InputError(
        `Cannot read ${name}:${line}: lines end in a lone carriage return; save the file with LF or CR LF line ends`,
        { file: name, line },
      );
    }
    // A lone carriage return inside a line would count as a line end with the parser, and not with an editor.
    text = text.replaceAll("\r", " ");
  }
  return { text, line };
}

function notUtf8(
  bytes: Uint8Array,
  name: string,
  state: { line: number; first: boolean },
  cause: unknown,
): InputError {
  let line = state.line;
  for (let from = 0; from < bytes.length; line++) {
    const end = bytes.indexOf(LINE_FEED, from);
    const stop = end < 0 ? bytes.length : end;
    if (!isUtf8(bytes.subarray(from, stop))) break;
    from = stop + 1;
  }
  const utf16 = state.first &&
    ((bytes[0] === 0xff && bytes[1] === 0xfe) || (bytes[0] === 0xfe && bytes[1] === 0xff));
  const why = utf16 ? "the file is UTF-16 text" : "the line holds bytes that are no UTF-8 text";
  return new InputError(`Cannot read ${name}:${line}: ${why}; save the file as UTF-8`, { file: name, line }, {
    cause,
  });
}

function isUtf8(bytes: Uint8Array): boolean {
  try {
    new TextDecoder("utf-8", { fatal: true }).decode(bytes);
    return true;
  } catch {
    return false;
  }
}

function countLineFeeds(bytes: Uint8Array): number {
  let n = 0;
  for (let i = 0; i < bytes.length; i++) if (bytes[i] === LINE_FEED) n++;
  return n;
}

function joined(a: Uint8Array, b: Uint8Array): Uint8Array {
  const both = new Uint8Array(a.length + b.length);
  both.set(a);
  both.set(b, a.length);
  return both;
}

const sample = (bytes: Uint8Array): string => new TextDecoder().decode(bytes.subarray(0, 200)).slice(0, 60);
