import { InvalidArgumentError, Option } from "commander";
import { z } from "zod";

/** Reads a flag's value through a schema; what the schema says becomes the message. */
function through<T>(schema: z.ZodType<T>): (value: string) => T {
  return (value) => {
    const parsed = schema.safeParse(value);
    if (parsed.success) return parsed.data;
    throw new InvalidArgumentError(parsed.error.issues[0]?.message ?? "it does not fit");
  };
}

function wholeNumber(least: number, most: number): z.ZodType<number> {
  const error = `write a whole number from ${least} to ${most}`;
  return z
    .string()
    .regex(/^\d+$/, error)
    .transform(Number)
    .refine((value) => value >= least && value <= most, error);
}

const MAX_LEVELS = 400;

/** "15..60", "15..60..2.5" or "20,30,40" as reflectivities in dBZ. */
const reflectivityList = z.string().transform((text, context) => {
  const range = /^(-?\d+(?:\.\d+)?)\.\.(-?\d+(?:\.\d+)?)(?:\.\.(\d+(?:\.\d+)?))?$/.exec(text);
  const levels: number[] = [];
  if (range !== null) {
    const [from, to, step] = [Number(range[1]), Number(range[2]), Number(range[3] ?? 5)];
    const steps = step > 0 ? Math.floor((to - from) / step + 1e-9) : -1;
    for (let index = 0; index <= Math.min(steps, MAX_LEVELS); index += 1) levels.push(from + index * step);
  } else if (/^-?\d+(\.\d+)?(,-?\d+(\.\d+)?)*$/.test(text)) {
    levels.push(...text.split(",").map(Number));
  }
  if (levels.length === 0 || levels.length > MAX_LEVELS || levels.some((dbz) => dbz < -40 || dbz > 90)) {
    context.addIssue({
      code: "custom",
      message: 'write "15..60", "15..60..2.5" or "20,30,40", between -40 and 90 dBZ',
    });
    return z.NEVER;
  }
  return levels;
});

/** A hail cap as plans hold it: "53dBZ" or "100mm/h". */
const capValue = z.string().transform((text, context): { dbz: number } | { mmPerHour: number } => {
  const parts = /^(\d+(?:\.\d+)?)\s*(dBZ|mm\/h)$/i.exec(text);
  const value = Number(parts?.[1]);
  const inDbz = parts?.[2]?.toLowerCase() === "dbz";
  if (parts === null || value < (inDbz ? 30 : 1) || value > (inDbz ? 80 : 1000)) {
    context.addIssue({ code: "custom", message: 'write "53dBZ" (30 to 80) or "100mm/h" (1 to 1000)' });
    return z.NEVER;
  }
  return inDbz ? { dbz: value } : { mmPerHour: value };
});

/** Every flag of every command, each once: name, unit, default, help text. */
export const flags = {
  // All commands
  json: () => new Option("--json", "result as JSON on stdout; everything else stays on stderr"),
  schema: () => new Option("--schema", "print the JSON schema of --json and stop"),
  quiet: () => new Option("-q, --quiet", "nothing on stderr but errors"),
  debug: () => new Option("--debug", "show the stack of an error"),
  noColour: () => new Option("--no-color", "no colours (the variable NO_COLOR does the same)"),

  // plan
  planFile: () => new Option("-o, --out <file>", "the plan to write").default("plan.yaml"),
  update: () => new Option("--update", "add what is new to an existing plan; edits and comments stay"),
  replacePlan: () => new Option("--force", "write over an existing plan"),
  title: () => new Option("--title <text>", "title of the plan").default("Rain total"),

  // total
  runFolder: () => new Option("--out <dir>", "folder for the results").makeOptionMandatory(),
  dryRun: () =>
    new Option("--dry-run", "say what would be done and what it takes: scans, memory, disk, minutes"),
  workers: () =>
    new Option(
      "--workers <n>",
      "scans are worked on by so many processors at once; the results are the same bytes",
    )
      .argParser(through(wholeNumber(1, 64)))
      .default(1),
  moveAside: () => new Option("--force", "move another run in that folder aside (nothing is deleted)"),
  strict: () => new Option("--strict", "exit with 1 when any input was left out"),

  // relate table
  dbz: () =>
    new Option("--dbz <list>", "reflectivities, dBZ: from..to, from..to..step, or a list with commas")
      .argParser(through(reflectivityList))
      .default(reflectivityList.parse("15..60"), "15..60, every 5"),
  relation: () =>
    new Option(
      "--relation <name...>",
      "only these relations, by name or as A,b (Z = A R^b, Z in mm6 m-3, R in mm/h)",
    ),
  cap: () =>
    new Option("--cap <cap>", "hail cap, in dBZ or mm/h: 53dBZ, 100mm/h")
      .argParser(through(capValue))
      .default({ dbz: 53 }, "53dBZ"),
} as const;
