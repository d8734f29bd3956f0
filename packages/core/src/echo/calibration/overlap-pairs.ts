/**
 * Echo of two radars from the same rain: at about equal height, about equally far from both, at nearly the same time.
 * Shapes [count], in an order that does not depend on the order of the scans.
 */
export interface OverlapPairs {
  readonly oneSiteId: string;
  readonly otherSiteId: string;
  readonly count: number;
  /** Pairs there were; of more than there is room for an even part is kept. */
  readonly seen: number;
  /** Mean of Z over a cell, as dBZ, with all that had been corrected by then. */
  readonly oneDbz: Float32Array;
  readonly otherDbz: Float32Array;
  /** What of that was added for attenuation in rain. */
  readonly oneAddedDb: Float32Array;
  readonly otherAddedDb: Float32Array;
  /** Two-way loss as estimated, rain and gas; NaN where it was not. */
  readonly oneLossDb: Float32Array;
  readonly otherLossDb: Float32Array;
  /** Rain's phase from the antenna; NaN where it was not worked up. */
  readonly onePhaseDeg: Float32Array;
  readonly otherPhaseDeg: Float32Array;
  readonly heightAslM: Float32Array;
  /** 0 to 1: 1 for beams of equal height from equally far. */
  readonly weight: Float32Array;
  /** Mid-time of the first radar's sweep. */
  readonly epochMs: Float64Array;
}

/** The same pairs seen from the other radar. */
export function turned(pairs: OverlapPairs): OverlapPairs {
  return {
    ...pairs,
    oneSiteId: pairs.otherSiteId,
    otherSiteId: pairs.oneSiteId,
    oneDbz: pairs.otherDbz,
    otherDbz: pairs.oneDbz,
    oneAddedDb: pairs.otherAddedDb,
    otherAddedDb: pairs.oneAddedDb,
    oneLossDb: pairs.otherLossDb,
    otherLossDb: pairs.oneLossDb,
    onePhaseDeg: pairs.otherPhaseDeg,
    otherPhaseDeg: pairs.onePhaseDeg,
  };
}
