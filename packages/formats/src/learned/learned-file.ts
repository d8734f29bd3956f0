import { InputError } from "@rainreckon/core";
import { hdf5Ready, openHdf5 } from "../hdf5/index.ts";
import { type ElementType, Hdf5Output } from "../write/hdf5-output.ts";

/** Arrays that a learned file can hold. */
export type LearnedArray = Uint8Array | Uint16Array | Int32Array | Float32Array | Float64Array;

/** Numbers, words and arrays under names, as deep as it takes. What is undefined is left out. */
export type LearnedValue =
  | number
  | string
  | boolean
  | null
  | undefined
  | LearnedArray
  | readonly LearnedValue[]
  | { readonly [name: string]: LearnedValue };

/** Stands in the contents for an array, and for numbers that JSON has no word for. */
interface Stand {
  readonly variable?: string;
  readonly length?: number;
  readonly number?: "NaN" | "Infinity" | "-Infinity";
}

const CONTENTS = "contents";
/** Key that no name of ours begins with. */
const STAND = "=";

const TYPES: readonly {
  readonly make: new (length: number) => LearnedArray;
  readonly type: ElementType;
}[] = [
  { make: Uint8Array, type: "<B" },
  { make: Uint16Array, type: "<H" },
  { make: Int32Array, type: "<i" },
  { make: Float32Array, type: "<f" },
  { make: Float64Array, type: "<d" },
];

/**
 * Writes what a run learned before its units of work: NetCDF-4, each array a variable that is named after its place,
 * and beside them `contents`, JSON text of everything else with the names of the arrays where they belong.
 *
 * The same values give the same bytes.
 *
 * @param values - plain objects, lists, numbers and typed arrays; an empty array is kept
 * @throws InputError (usage) when the file cannot be written
 */
export async function writeLearned(
  path: string,
  values: { readonly [name: string]: LearnedValue },
  attributes: Readonly<Record<string, string>>,
): Promise<void> {
  const file = await Hdf5Output.create(path);
  try {
    file.setAttributes("/", { Conventions: "CF-1.8", ...attributes });
    const taken = new Set([CONTENTS]);
    const put = (value: LearnedValue, place: readonly string[]): unknown => {
      if (ArrayBuffer.isView(value)) {
        const known = TYPES.find(({ make }) => value instanceof make);
        if (known === undefined) throw new RangeError(`${place.join(".")} is of no type that is kept`);
        if (value.length === 0) return { [STAND]: { variable: known.type, length: 0 } satisfies Stand };
        const variable = freeName(place, taken);
        file.createDataset(variable, { type: known.type, shape: [value.length] }, value);
        file.makeScale(variable, variable);
        return { [STAND]: { variable, length: value.length } satisfies Stand };
      }
      if (typeof value === "number" && !Number.isFinite(value))
        return { [STAND]: { number: String(value) as "NaN" } satisfies Stand };
      if (Array.isArray(value)) return value.map((one, i) => put(one as LearnedValue, [...place, String(i)]));
      if (typeof value === "object" && value !== null) {
        return Object.fromEntries(
          Object.entries(value)
            .filter(([, one]) => one !== undefined)
            .map(([name, one]) => [name, put(one as LearnedValue, [...place, name])]),
        );
      }
      return value;
    };
    const text = Buffer.from(JSON.stringify(put(values, [])));
    file.createDataset(CONTENTS, { type: "<B", shape: [text.length] }, new Uint8Array(text));
    file.makeScale(CONTENTS, CONTENTS);
    file.setAttributes(CONTENTS, { long_name: "UTF-8 text: JSON of what is no array" });
    file.close();
  } catch (cause) {
    file.abandon();
    throw cause;
  }
}

/** `zzsal_static_echo_0_share`; the same place always gives the same name. */
function freeName(place: readonly string[], taken: Set<string>): string {
  const plain = place
    .map((part) => part.replace(/([a-z])([A-Z])/g, "$1_$2").toLowerCase())
    .join("_")
    .replace(/[^a-z0-9_]/g, "_");
  const base = /^[a-z]/.test(plain) ? plain : `v_${plain}`;
  let name = base;
  for (let n = 2; taken.has(name); n++) name = `${base}_${n}`;
  taken.add(name);
  return name;
}

/**
 * Reads what {@link writeLearned} wrote.
 *
 * @throws InputError where the file is damaged or of another make
 */
export async function readLearned(path: string): Promise<{ readonly [name: string]: LearnedValue }> {
  await hdf5Ready();
  const file = openHdf5(path);
  try {
    const bytes = file.read(`/${CONTENTS}`);
    const parsed: unknown = JSON.parse(Buffer.from(Uint8Array.from(bytes)).toString("utf8"));
    const take = (value: unknown): LearnedValue => {
      if (Array.isArray(value)) return value.map(take);
      if (typeof value !== "object" || value === null) return value as LearnedValue;
      const stand = (value as Record<string, unknown>)[STAND] as Stand | undefined;
      if (stand === undefined)
        return Object.fromEntries(Object.entries(value).map(([name, one]) => [name, take(one)]));
      if (stand.number !== undefined) return Number(stand.number);
      if (stand.length === 0) {
        const known = TYPES.find(({ type }) => type === stand.variable);
        return known === undefined ? undefined : new known.make(0);
      }
      return file.read(`/${stand.variable}`) as LearnedArray;
    };
    return take(parsed) as { readonly [name: string]: LearnedValue };
  } catch (cause) {
    if (cause instanceof InputError) throw cause;
    throw new InputError("this is no file of learned facts, or it is damaged", path, "run total again", {
      cause,
    });
  } finally {
    file.close();
  }
}
