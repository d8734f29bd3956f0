import {
  type CapSetting,
  findRelation,
  type Interval,
  relationCaution,
  resolveCap,
  type ZrRelation,
  zrRelation,
} from "@rainreckon/core";
import type { PlanRadar } from "../plan/schema.ts";
import type { LeftOutLog } from "../ui/left-out.ts";
import type { JobConversion, JobRelation } from "./job.ts";

const FOREVER: Interval = { startEpochMs: Number.NEGATIVE_INFINITY, endEpochMs: Number.POSITIVE_INFINITY };

/** A relation of the plan: from the catalogue by name, or coefficients of the user's own. */
export function relationOf(relation: PlanRadar["relation"]): ZrRelation {
  return typeof relation === "string"
    ? findRelation(relation)
    : zrRelation(relation.a, relation.b, relation.source);
}

/** What a plan says of how the reflectivity of a source becomes rain. */
interface PlannedConversion {
  readonly moment: string;
  readonly offsetDb: number;
  readonly cap: CapSetting;
  readonly minRateMmPerHour: number;
  readonly relation: PlanRadar["relation"];
  readonly periods: PlanRadar["periods"];
}

/**
 * How the reflectivity of a source becomes rain; what is doubtful about its relations or its cap goes to the log.
 *
 * @param source - what it is called there, such as "radar norst"
 */
export function conversionOf(planned: PlannedConversion, source: string, log: LeftOutLog): JobConversion {
  const { moment, offsetDb, cap, minRateMmPerHour } = planned;
  const relations: JobRelation[] = [
    { ...FOREVER, relation: relationOf(planned.relation) },
    ...planned.periods.map(({ from, to, relation }) => ({
      startEpochMs: Date.parse(from),
      endEpochMs: Date.parse(to),
      relation: relationOf(relation),
    })),
  ];
  for (const { relation } of relations) {
    const where = `${source}, Z = ${relation.a} R^${relation.b}`;
    const caution = relationCaution(relation);
    if (caution !== undefined)
      log.add("doubted", { what: caution, where, fix: "choose a relation for rain" });
    const { warning } = resolveCap(cap, relation);
    if (warning !== undefined) log.add("doubted", { what: warning, where, fix: "set the cap in the plan" });
  }
  return { moment, offsetDb, cap, minRateMmPerHour, relations };
}
