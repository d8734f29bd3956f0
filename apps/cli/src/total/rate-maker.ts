import {
  InputError,
  momentRates,
  type RateSettings,
  type Rates,
  rateTable,
  resolveCap,
  type Sweep,
  type ZrRelation,
} from "@rainreckon/core";
import type { GateRates } from "@rainreckon/mosaic";
import type { JobConversion } from "./job.ts";

/** Turns stored reflectivity of one source into rates, remembering tables: radars repeat their coding. */
export class RateMaker {
  readonly #source: JobConversion;
  readonly #tables = new Map<string, Rates>();

  constructor(source: JobConversion) {
    this.#source = source;
  }

  relationAt(epochMs: number): ZrRelation {
    const { relations } = this.#source;
    for (let k = relations.length - 1; k >= 0; k--) {
      if (epochMs > relations[k].startEpochMs && epochMs <= relations[k].endEpochMs)
        return relations[k].relation;
    }
    return relations[0].relation;
  }

  /** @throws InputError where the sweep has no such moment, or a coding that means nothing */
  rates(sweep: Pick<Sweep, "moments">, relation: ZrRelation, where: string): GateRates {
    const { moment: quantity, cap, minRateMmPerHour, offsetDb } = this.#source;
    const moment = sweep.moments.get(quantity);
    if (moment === undefined)
      throw new InputError(`no ${quantity}`, where, "name another moment in the plan");
    const settings: RateSettings = {
      relation,
      cap: resolveCap(cap, relation),
      minRateMmPerHour,
      offsetDb,
    };
    const { stored, gain, offset, nodata, undetect } = moment;
    if (!(stored instanceof Uint8Array || stored instanceof Uint16Array)) {
      const { rate, capped } = momentRates(moment, settings, where);
      return { codes: undefined, rateMmPerHour: rate, capped };
    }
    const key = [
      stored.BYTES_PER_ELEMENT,
      gain,
      offset,
      nodata,
      undetect,
      relation.a,
      relation.b,
      relation.phase,
    ].join();
    let table = this.#tables.get(key);
    if (table === undefined) {
      table = rateTable(moment, stored, settings, where);
      this.#tables.set(key, table);
    }
    return { codes: stored, rateMmPerHour: table.rate, capped: table.capped };
  }
}

/** Number of gates at or above the cap. */
export function countCapped({ codes, capped }: GateRates): number {
  let count = 0;
  if (codes === undefined) for (const flag of capped) count += flag;
  else if (capped.includes(1)) for (const code of codes) count += capped[code];
  return count;
}
