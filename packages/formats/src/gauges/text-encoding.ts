import { InputError } from "@rainreckon/core";
import { found, type Guess, guessed } from "./guess.ts";

/** Encodings of tables, by their names in the WHATWG Encoding Standard; Latin-1 is read as windows-1252, as there. */
export const TEXT_ENCODINGS = ["utf-8", "utf-16le", "utf-16be", "windows-1252"] as const;
export type TextEncodingName = (typeof TEXT_ENCODINGS)[number];

/** Control characters that no table holds; tab, line ends, form feed and the old end-of-file mark may stand. */
const CONTROL = /[\u0000-\u0008\u000b\u000e-\u0019\u001b-\u001f]/;
/** Share of pairs with a zero byte on the same side from which text is taken for UTF-16 without a mark. */
const UTF16_SHARE = 0.5;
/** Fewer bytes than this say nothing. */
const UTF16_LEAST_BYTES = 32;

/**
 * The encoding of a text by the bytes of its two ends: a byte order mark, zero bytes on one side of every
 * pair, else UTF-8 where the bytes are valid, else windows-1252.
 *
 * @param tail - the last bytes where `head` is not all there is; from an even place in the file
 * @returns undefined where this is no text
 */
export function guessEncoding(head: Uint8Array, tail: Uint8Array): Guess<TextEncodingName> | undefined {
  if (head[0] === 0xef && head[1] === 0xbb && head[2] === 0xbf) return found("utf-8", "byte order mark");
  if (head[0] === 0xff && head[1] === 0xfe) return found("utf-16le", "byte order mark");
  if (head[0] === 0xfe && head[1] === 0xff) return found("utf-16be", "byte order mark");
  if (head.includes(0)) return guessUtf16(head);
  if (tail.includes(0)) return undefined;
  if (isUtf8(head) && isUtf8(fromCharacterStart(tail))) return found("utf-8", "the bytes are valid UTF-8");
  const text = new TextDecoder("windows-1252").decode(head);
  return CONTROL.test(text)
    ? undefined
    : guessed("windows-1252", "the bytes are not valid UTF-8; Latin-1 is read likewise");
}

/**
 * As {@link guessEncoding}; what the plan says holds where no byte order mark contradicts it.
 *
 * @throws InputError where this is no text, or has a byte order mark of another encoding than `planned`
 */
export function settleEncoding(
  head: Uint8Array,
  tail: Uint8Array,
  planned: TextEncodingName | undefined,
  path: string,
): TextEncodingName {
  const seen = guessEncoding(head, tail);
  if (planned !== undefined) {
    if (seen?.reason === "byte order mark" && seen.value !== planned) {
      throw new InputError(
        `the text is ${seen.value} by its byte order mark, not ${planned}`,
        path,
        `write encoding: ${seen.value}`,
      );
    }
    return planned;
  }
  if (seen === undefined) throw new InputError("this is not a text file", path, "give a CSV file");
  return seen.value;
}

function guessUtf16(head: Uint8Array): Guess<TextEncodingName> | undefined {
  if (head.length < UTF16_LEAST_BYTES) return undefined;
  const zeros = [0, 0];
  for (let at = 0; at < head.length; at++) if (head[at] === 0) zeros[at & 1] += 1;
  const pairs = head.length / 2;
  const reason = "every other byte is zero";
  if (zeros[1] > UTF16_SHARE * pairs && zeros[0] === 0) return guessed("utf-16le", reason);
  if (zeros[0] > UTF16_SHARE * pairs && zeros[1] === 0) return guessed("utf-16be", reason);
  return undefined;
}

function isUtf8(bytes: Uint8Array): boolean {
  try {
    // As a stream: the last character may be cut.
    new TextDecoder("utf-8", { fatal: true }).decode(bytes, { stream: true });
    return true;
  } catch {
    return false;
  }
}

/** Without the rest of a character that begins before: at most three bytes. */
function fromCharacterStart(bytes: Uint8Array): Uint8Array {
  let from = 0;
  while (from < 3 && from < bytes.length && (bytes[from] & 0xc0) === 0x80) from += 1;
  return bytes.subarray(from);
}
