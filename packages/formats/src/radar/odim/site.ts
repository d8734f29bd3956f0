import type { RadarSite } from "@rainreckon/core";

const LONGEST_NAME = 80;

/**
 * Site identity from ODIM's what/source, a list like "NOD:xxabc,WMO:01234,PLC:Somewhere".
 *
 * The same radar has the same id in every file: the NOD code, else RAD, else a WMO number that is one (00000
 * says "none"), else the position.
 */
export function radarSite(
  source: string,
  position: { readonly lonDeg: number; readonly latDeg: number; readonly antennaHeightM: number },
): RadarSite {
  const parts = sourceParts(source);
  const name = parts.get("PLC") ?? parts.get("CTY");
  return { id: identity(parts, position), ...(name === undefined ? {} : { name }), ...position };
}

function identity(
  parts: ReadonlyMap<string, string>,
  { lonDeg, latDeg }: { readonly lonDeg: number; readonly latDeg: number },
): string {
  const node = parts.get("NOD");
  if (node !== undefined && isCode(node)) return node.toLowerCase();
  const radar = parts.get("RAD");
  if (radar !== undefined && isCode(radar)) return `RAD-${radar}`;
  const wmo = parts.get("WMO");
  if (wmo !== undefined && /^\d{5}$/.test(wmo) && wmo !== "00000") return `WMO-${wmo}`;
  return `AT-${latDeg.toFixed(4)}-${lonDeg.toFixed(4)}`;
}

/** A code goes into file names, keys and tables: letters, digits and marks that mean nothing there. */
function isCode(text: string): boolean {
  return /^[A-Za-z0-9][A-Za-z0-9_.-]{1,31}$/.test(text);
}

function sourceParts(source: string): ReadonlyMap<string, string> {
  const parts = new Map<string, string>();
  for (const part of source.split(",")) {
    const colon = part.indexOf(":");
    if (colon < 0) continue;
    const key = part.slice(0, colon).trim().toUpperCase();
    const value = printable(part.slice(colon + 1));
    if (value !== "" && !parts.has(key)) parts.set(key, value);
  }
  return parts;
}

/** Names come from strangers: no control, format or surrogate characters, and no endless ones. */
function printable(text: string): string {
  return text.replace(/\p{C}/gu, "").trim().slice(0, LONGEST_NAME);
}
