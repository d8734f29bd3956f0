import {
  type CapSetting,
  findRelation,
  InputError,
  type PublishedRelation,
  RELATIONS,
  rainRateMmPerHour,
  relationCaution,
  resolveCap,
  type ZrRelation,
  zrRelation,
} from "@rainreckon/core";
import { z } from "zod";
import { decimals, fixedDecimals } from "../ui/numbers.ts";
import { textTable } from "../ui/table.ts";

const rate = z.number();

/** The result of `relate table --json`. */
export const relationTableSchema = z.strictObject({
  format: z.literal("rainreckon-relations-1"),
  relations: z.array(
    z.strictObject({
      name: z.string(),
      a: z.number().describe("A in Z = A R^b, Z in mm6 m-3, R in mm/h"),
      b: z.number(),
      phase: z.enum(["rain", "snow"]),
      regime: z.string(),
      /** How sure A and b are. */
      standing: z.string(),
      source: z.string(),
      validRateMmPerHour: z.strictObject({ low: rate, high: rate, standing: z.string() }).nullable(),
      cap: z.strictObject({
        dbz: z.number(),
        mmPerHour: rate,
        given: z.enum(["dbz", "mmPerHour"]),
        warning: z.string().optional(),
      }),
      caution: z.string().optional(),
      rates: z.array(
        z.strictObject({
          dbz: z.number(),
          rainRateMmPerHour: rate,
          atCap: z.boolean().describe("true from the cap up"),
        }),
      ),
    }),
  ),
});

export type RelationTable = z.output<typeof relationTableSchema>;

/**
 * Relations beside each other: the rate each gives for the same reflectivities, by ascending b, then A.
 *
 * @param relations - checked relations; those of the catalogue, or of the user
 * @param dbz - reflectivities, dBZ
 */
export function relationTable(
  relations: readonly NamedRelation[],
  dbz: readonly number[],
  capSetting: CapSetting,
): RelationTable {
  const sorted = [...relations].sort((one, other) => one.b - other.b || one.a - other.a);
  return {
    format: "rainreckon-relations-1",
    relations: sorted.map((relation) => {
      const cap = resolveCap(capSetting, relation);
      const caution = relationCaution(relation);
      const { name, a, b, phase, source, regime, standing, validRateMmPerHour } = relation;
      return {
        name,
        a,
        b,
        phase,
        regime,
        standing,
        source,
        validRateMmPerHour,
        cap,
        ...(caution === undefined ? {} : { caution }),
        rates: dbz.map((level) => ({
          dbz: level,
          rainRateMmPerHour: rainRateMmPerHour(level, relation),
          atCap: level >= cap.dbz,
        })),
      };
    }),
  };
}

/** A relation of the catalogue, or one of the user's own, which has no published range. */
export type NamedRelation = ZrRelation & {
  readonly name: string;
  readonly regime: string;
  readonly standing: string;
  readonly validRateMmPerHour: PublishedRelation["validRateMmPerHour"] | null;
};

/**
 * Relations by catalogue name or as "A,b".
 *
 * @param names - undefined: the whole catalogue
 * @throws InputError (kind "usage") where a name leads nowhere, or A and b are no numbers above 0
 */
export function relationsByName(names: readonly string[] | undefined): readonly NamedRelation[] {
  if (names === undefined) return RELATIONS;
  return names.map((name) => {
    const parts = /^([^,]+),([^,]+)$/.exec(name);
    if (parts === null) return findRelation(name, "--relation");
    const [a, b] = [Number(parts[1]), Number(parts[2])];
    if (!(a > 0 && b > 0 && Number.isFinite(a) && Number.isFinite(b))) {
      throw new InputError(`"${name}" is no relation`, "--relation", "write A,b like 200,1.6, both above 0", {
        kind: "usage",
      });
    }
    return {
      ...zrRelation(a, b, "command line"),
      name: `own-${a}/${b}`,
      regime: "not known",
      standing: "given on the command line",
      validRateMmPerHour: null,
    };
  });
}

/** A relation table for people. */
export function relationTableText(table: RelationTable): string {
  const levels = table.relations[0]?.rates.map(({ dbz }) => dbz) ?? [];
  const rates = textTable(
    [
      { head: "mm/h at dBZ" },
      ...levels.map((dbz) => ({ head: decimals(dbz, 1), align: "right" as const })),
      { head: "cap, dBZ", align: "right" },
      { head: "cap, mm/h", align: "right" },
    ],
    table.relations.map((relation) => [
      relation.name,
      ...relation.rates.map((one) => `${rateText(one.rainRateMmPerHour)}${one.atCap ? "*" : " "}`),
      fixedDecimals(relation.cap.dbz, 1),
      fixedDecimals(relation.cap.mmPerHour, 1),
    ]),
  );
  const origins = textTable(
    [
      { head: "relation" },
      { head: "made for" },
      { head: "valid, mm/h" },
      { head: "standing" },
      { head: "source" },
    ],
    table.relations.map((relation) => [
      relation.name,
      relation.regime,
      relation.validRateMmPerHour === null
        ? "–"
        : `${relation.validRateMmPerHour.low} to ${relation.validRateMmPerHour.high} (${relation.validRateMmPerHour.standing})`,
      relation.standing,
      relation.source,
    ]),
  );
  const said = table.relations.flatMap(({ name, cap, caution }) =>
    [cap.warning, caution].filter((text) => text !== undefined).map((text) => `${name}: ${text}`),
  );
  const parts = [
    rates,
    "* the cap is met: the plan's cap holds the rate at the number on the right",
    origins,
  ];
  if (said.length > 0) parts.push(`Mind:\n${said.map((line) => `  ${line}`).join("\n")}`);
  return parts.join("\n\n");
}

/** Three figures that matter, and never an exponent. */
function rateText(rainRate: number): string {
  if (rainRate >= 100) return rainRate.toFixed(0);
  return rainRate >= 10 ? rainRate.toFixed(1) : rainRate.toFixed(2);
}
