import { type DecimalMark, decimalOf } from "./decimal.ts";
import { type Guess, guessed } from "./guess.ts";
import type { StationColumns } from "./stations.ts";
import { isNumeric, type TableSample } from "./table-sample.ts";
import type { TextEncodingName } from "./text-encoding.ts";

const X_WORDS = /^(x|lon|long|longitude|lon_?deg|longitude_?deg|easting|east|eastings|x_?m|lng)$/i;
const Y_WORDS = /^(y|lat|latitude|lat_?deg|latitude_?deg|northing|north|northings|y_?m)$/i;
const ELEVATION_WORDS =
  /^(z|elev|elevation|height|altitude|alt|masl|hoehe)([ _(-]?(m|masl|asl|above.*)\)?)?$/i;
const NAME_WORDS = /name|place|location/i;
/** Headers of a column of ids. */
export const GAUGE_WORDS = /^(id|code|stn|(gauge|station|site|sensor)([_ -]?(id|no|nr|number|code))?)$/i;
/** Headers of ids in a table of stations; among readings, "NO" may well be a gauge. */
const NUMBER_WORDS = /^(nr|no|number)$/i;

const VALID_FROM_WORDS = /^(from|since|(valid|open|opened|start|begin)([_ -]?(from|date|day|since))?)$/i;
const VALID_TO_WORDS = /^(to|until|(valid|close|closed|end)([_ -]?(to|until|date|day)))$/i;
const TIP_WORDS = /^tip([_ -]?(size|depth|volume|mm)){0,2}$/i;
const HEATED_WORDS = /^(is[_ -]?)?heat(ed|ing)$/i;
const CORRECTIONS_WORDS = /^(correct(ion|ions|ed)([_ -]?applied)?|applied[_ -]?corrections?)$/i;

export interface StationsGuess {
  readonly columns: Guess<StationColumns>;
  /** "EPSG:4326" where x and y can be degrees; undefined where they are metres of a system nobody named. */
  readonly crs: Guess<string | undefined>;
  readonly decimal: DecimalMark;
  readonly encoding: Guess<TextEncodingName>;
  /** Line of the header, where it is not the first with text in it. */
  readonly headerLine?: number;
  readonly ids: readonly string[];
  readonly whole: boolean;
}

/** The table as a list of stations; undefined where it has no coordinates, or lists ids again and again. */
export function guessStations(
  sample: TableSample,
  form: Pick<StationsGuess, "encoding" | "headerLine">,
): StationsGuess | undefined {
  const { columns, rows } = sample;
  const plain = columns.map((header) => header.replace(/\s*[[(].*$/, "").trim());
  const xAt = plain.findIndex((header, at) => X_WORDS.test(header) && isNumeric(sample, at));
  const yAt = plain.findIndex((header, at) => Y_WORDS.test(header) && isNumeric(sample, at));
  if (xAt < 0 || yAt < 0) return undefined;
  const free = columns.map((_, at) => at).filter((at) => at !== xAt && at !== yAt && at !== sample.timeAt);
  // A gauge that moved has an entry for each place, so ids may repeat where entries have dates.
  const dated = plain.some((header) => VALID_FROM_WORDS.test(header));
  const isUnique = (at: number) =>
    new Set(rows.map((row) => row[at])).size >= (dated ? 0.3 : 0.9) * rows.length;
  const wordAt = free.find((at) => GAUGE_WORDS.test(plain[at]) || NUMBER_WORDS.test(plain[at]));
  const idAt = wordAt ?? free.find(isUnique);
  if (idAt === undefined || !isUnique(idAt)) return undefined;
  const headed = (words: RegExp) => {
    const at = columns.findIndex((_, column) => column !== idAt && words.test(plain[column]));
    return at < 0 ? undefined : columns[at];
  };
  const validFrom = headed(VALID_FROM_WORDS);
  const validTo = headed(VALID_TO_WORDS);
  const tipMm = headed(TIP_WORDS);
  const heated = headed(HEATED_WORDS);
  const corrections = headed(CORRECTIONS_WORDS);
  const nameAt = free.find((at) => at !== idAt && NAME_WORDS.test(plain[at]));
  const elevationAt = free.find(
    (at) => at !== idAt && ELEVATION_WORDS.test(plain[at]) && isNumeric(sample, at),
  );
  const degrees = rows.every((row) => {
    const x = decimalOf(row[xAt], sample.decimal);
    const y = decimalOf(row[yAt], sample.decimal);
    return !(Math.abs(x) > 360 || Math.abs(y) > 90);
  });
  return {
    columns: guessed(
      {
        id: columns[idAt],
        x: columns[xAt],
        y: columns[yAt],
        ...(nameAt === undefined ? {} : { name: columns[nameAt] }),
        ...(elevationAt === undefined ? {} : { elevation: columns[elevationAt] }),
        ...(validFrom === undefined ? {} : { validFrom }),
        ...(validTo === undefined ? {} : { validTo }),
        ...(tipMm === undefined ? {} : { tipMm }),
        ...(heated === undefined ? {} : { heated }),
        ...(corrections === undefined ? {} : { corrections }),
      },
      wordAt === undefined
        ? "from the headers; the id is the first column without repeats"
        : "from the headers",
    ),
    crs: degrees
      ? guessed("EPSG:4326", "x and y lie within the range of longitude and latitude")
      : guessed(undefined, "x and y are too large for degrees; the file does not name their system"),
    decimal: sample.decimal,
    ...form,
    ids: rows.map((row) => row[idAt]),
    whole: sample.whole,
  };
}
