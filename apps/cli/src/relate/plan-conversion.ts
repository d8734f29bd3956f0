import { type CapSetting, findRelation, InputError, zrRelation } from "@rainreckon/core";
import type { Plan, PlanRadar } from "../plan/schema.ts";
import type { NamedRelation } from "./relation-table.ts";

/** How a plan turns reflectivity into rain. */
export interface PlanConversion {
  readonly relation: NamedRelation;
  readonly cap: CapSetting;
  readonly minRateMmPerHour: number;
}

/**
 * Relation and cap of a plan's first radar that is used; of its first grids where there is none.
 *
 * @throws InputError (kind "usage") where that is a relation for snow
 */
export function planConversion(plan: Plan): PlanConversion {
  const source = plan.radars.find(({ use }) => use) ?? plan.grids[0];
  if (source === undefined) throw new RangeError("a plan has a radar or grids");
  const { minRateMmPerHour } = plan.rain;
  return { relation: ofRain(named(source.relation)), cap: source.cap, minRateMmPerHour };
}

/** What of a plan's way to rain has no part where one relation and one cap stand for all of it, in sentences. */
export function whatIsLeftAside({ radars, grids, echo }: Plan): string[] {
  const used = radars.filter(({ use }) => use);
  const remarks: string[] = [];
  const ways = new Set(
    [...used, ...grids.filter(({ quantity }) => quantity === "reflectivity")].map(({ relation, cap }) =>
      JSON.stringify([relation, cap]),
    ),
  );
  if (ways.size > 1) {
    remarks.push(
      `the sources of the plan have different relations or caps: those of ${used[0]?.id ?? grids[0]?.id} stand for all`,
    );
  }
  if (used.some(({ periods }) => periods.length > 0)) {
    remarks.push("the plan has other relations for parts of the window: they have no part here");
  }
  if (echo.rate.convective !== undefined || echo.rate.stratiform !== undefined) {
    remarks.push("the plan has relations for showers and widespread rain: they have no part here");
  }
  return remarks;
}

function named(relation: PlanRadar["relation"]): NamedRelation {
  if (typeof relation === "string") return findRelation(relation);
  return {
    ...zrRelation(relation.a, relation.b, relation.source),
    name: `own-${relation.a}/${relation.b}`,
    regime: "not known",
    standing: "given in the plan",
    validRateMmPerHour: null,
  };
}

/**
 * A relation, if it is one for rain: snow needs reflectivity that was converted first, and gauges that catch it.
 *
 * @throws InputError (kind "usage") where it is not
 */
export function ofRain(relation: NamedRelation): NamedRelation {
  if (relation.phase === "rain") return relation;
  throw new InputError(
    `${relation.name} is a relation for snow`,
    "--relation, or the plan",
    "name a relation for rain",
    {
      kind: "usage",
    },
  );
}
