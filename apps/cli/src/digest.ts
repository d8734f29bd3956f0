import { createHash } from "node:crypto";

/** SHA-256 of a text (as UTF-8) or of bytes, in lower-case hexadecimal digits. */
export function sha256Hex(content: string | Uint8Array): string {
  return createHash("sha256").update(content).digest("hex");
}

/**
 * JSON with the keys of every object in code-unit order, so that equal values give equal text.
 *
 * @param value - what JSON can hold; a member that is undefined is left out
 */
export function canonicalJson(value: unknown): string {
  return JSON.stringify(value, (_key, member: unknown) => {
    if (member === null || typeof member !== "object" || Array.isArray(member)) return member;
    const entries = Object.entries(member).sort(([a], [b]) => (a < b ? -1 : 1));
    return Object.fromEntries(entries);
  });
}
