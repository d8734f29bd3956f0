const utf8 = new TextDecoder("utf-8", { fatal: true });
const latin1 = new TextDecoder("latin1");

/**
 * Text of a fixed or terminated string: up to the first NUL, without blanks at either end.
 *
 * Files that say ASCII or UTF-8 and hold Latin-1 are common; bytes that are not UTF-8 are read as that.
 */
export function decodeText(bytes: Uint8Array): string {
  const end = bytes.indexOf(0);
  const used = end < 0 ? bytes : bytes.subarray(0, end);
  try {
    return utf8.decode(used).trim();
  } catch {
    return latin1.decode(used).trim();
  }
}
