import { createRequire } from "node:module";

const require = createRequire(import.meta.url);

/** Longest description of a coordinate system that is looked at. */
const MAX_WKT_LENGTH = 20_000;
const ROOT =
  /^\s*(PROJCS|GEOGCS|PROJCRS|PROJECTEDCRS|GEOGCRS|GEOGRAPHICCRS|GEODCRS|GEODETICCRS)\s*[[(]\s*"([^"]{1,200})"/i;

/**
 * Datums that agree with WGS 84 to about 2 m, by the beginnings of their names. That they do is common
 * knowledge of the trade: all are tied to the ITRF, some at an epoch that plates have moved away from since.
 */
const WITHIN_TWO_METRES =
  /^(d_?)?(wgs_?(19)?84|world_geodetic_system_1984|etrs_?(19)?89|etrf|european_terrestrial_reference|nad_?(19)?83|north_american_(datum_)?1983|gda_?(19)?94|gda_?2020|geocentric_datum_of_australia|nzgd_?2000|new_zealand_geodetic_datum_2000|rgf_?(19)?93|reseau_geodesique_francais_1993|sirgas|sistema_de_referencia_geocentrico|jgd_?20(00|11)|japanese_geodetic_datum_20|itrf|csrs|rgaf|rgm|swiss_terrestrial_reference|ch1903\+_to)/i;

/** What a description of a coordinate system in well-known text (OGC 01-009, ISO 19162) says of itself. */
export interface WktFacts {
  readonly name: string;
  readonly geographic: boolean;
  /** EPSG code that the system as a whole claims. */
  readonly epsg?: string;
  /** Whether it is known how its datum lies to WGS 84: stated by TOWGS84, or the same within 2 m. */
  readonly datumKnown: boolean;
  readonly datum: string;
}

/** @returns undefined where the text is no well-known text of one horizontal system */
export function wktFacts(text: string): WktFacts | undefined {
  if (text.length > MAX_WKT_LENGTH) return undefined;
  const root = ROOT.exec(text);
  if (root === null) return undefined;
  const datum = /\b(?:DATUM|GEODETICDATUM|TRF|ENSEMBLE)\s*[[(]\s*"([^"]{1,200})"/i.exec(text)?.[1] ?? "";
  const epsg = rootCode(text);
  return {
    name: root[2],
    geographic: /^GEO/i.test(root[1]),
    ...(epsg === undefined ? {} : { epsg }),
    datumKnown: /\bTOWGS84\s*[[(]/i.test(text) || WITHIN_TWO_METRES.test(datum.replaceAll(" ", "_")),
    datum,
  };
}

/** The code in the AUTHORITY or ID that stands directly in the outermost brackets, not in a part. */
function rootCode(text: string): string | undefined {
  let depth = 0;
  let quoted = false;
  for (let at = 0; at < text.length; at++) {
    const character = text[at];
    if (character === '"') quoted = !quoted;
    if (quoted) continue;
    if (character === "]" || character === ")") depth -= 1;
    if (character !== "[" && character !== "(") continue;
    depth += 1;
    if (depth !== 2) continue;
    if (!/\b(AUTHORITY|ID)\s*$/i.test(text.slice(Math.max(0, at - 12), at))) continue;
    const code = /^\s*"EPSG"\s*,\s*"?(\d{1,6})"?/i.exec(text.slice(at + 1, at + 60))?.[1];
    if (code !== undefined) return code;
  }
  return undefined;
}

let codesByName: Map<string, string[]> | undefined;

/** EPSG codes of the systems with a name: as the register writes it, or as ESRI's .prj files do. */
export function codesOfName(name: string): readonly string[] {
  if (codesByName === undefined) {
    codesByName = new Map();
    const all = require("epsg-index/all.json") as Record<string, { name: string; kind: string }>;
    for (const [code, entry] of Object.entries(all)) {
      if (!/CRS-(PROJ|GEOG)CRS/.test(entry.kind)) continue;
      // "OSGB36 / British National Grid" also goes by what follows its datum.
      const short = entry.name.split(" / ")[1];
      for (const key of new Set([plain(entry.name), ...(short === undefined ? [] : [plain(short)])])) {
        const codes = codesByName.get(key);
        if (codes === undefined) codesByName.set(key, [code]);
        else codes.push(code);
      }
    }
  }
  return codesByName.get(plain(name)) ?? [];
}

/** A name without what writers do differently: case, separators, "GCS", years in full. */
function plain(name: string): string {
  return name
    .toLowerCase()
    .replace(/^gcs[_ ]/, "")
    .replace(/[^a-z0-9]+/g, " ")
    .replace(/\b(wgs|etrs|nad|gda|osgb|rgf|ed) ?(?:19)?(\d\d)\b/g, "$1$2")
    .replace(/ /g, "");
}
