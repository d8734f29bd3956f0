/**
 * What must not reach a terminal or a page as it stands: control characters (C0, DEL, C1), line and
 * paragraph separators, marks that turn the reading direction, invisible characters, the tag block,
 * halves of surrogate pairs.
 */
const UNSAFE =
  /[\u0000-\u001f\u007f-\u009f\u00ad\u061c\u200b-\u200f\u2028-\u202e\u2060-\u206f\ufeff\ufff9-\ufffb\u{e0000}-\u{e007f}\ud800-\udfff]/gu;

/**
 * Text from a file, made harmless to print on a terminal, and of bounded length.
 *
 * Tabs and line ends become a blank; other control characters, direction marks and invisible
 * characters are taken out. Letters of any script stay as they are.
 *
 * @param value - anything read from a file; what is not a string is shown as `String(value)`
 * @param maxLength - most characters (code points) of the result, at least 1; longer text ends in "…"
 */
export function displayText(value: unknown, maxLength = 200): string {
  // Cut before cleaning: no more than a few times the wanted length is ever looked at.
  const text = String(value).slice(0, maxLength * 8);
  const clean = text.replace(/[\t\r\n]+/g, " ").replace(UNSAFE, "");
  const characters = Array.from(clean);
  if (characters.length <= maxLength) return clean;
  return `${characters.slice(0, maxLength - 1).join("")}…`;
}
