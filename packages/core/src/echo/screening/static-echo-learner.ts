import type { PolarEcho } from "../polar-echo.ts";
import type { FixedEcho, LearnedStaticEcho, LearnedSweep } from "./static-echo.ts";
import { geometryOf, isSameGeometry, type SweepGeometry, slotOf } from "./sweep-geometry.ts";
import { rayBeside, type SweepView, viewSweep } from "./sweep-view.ts";

/** Rounds it takes to learn from. House rule. */
const ENOUGH_ROUNDS = 8;
/** Of the rounds that can tell, so many must show it. Common practice: 50 % (30 to 70) of dry-weather scans. */
export const STATIC_SHARE = 0.5;
/** And of all rounds at least so many, lest one dry spell decide. House rule. */
const OF_ALL_SHARE = 0.25;
/** And from first to last over so much of the run: a slow shower stands out at one place for half an hour. House rule. */
const SPAN_SHARE = 0.6;
/** Distance of the gates that tell what is around. House rule: beyond single points, within showers. */
const AROUND_M = 2000;
/** Of eight places around, so many must be weaker. House rule. */
const PLACES = 8;
const ENOUGH_PLACES = 6;
const OUTSTANDING_DB = 6;
const POINT_OUTSTANDING_DB = 10;
const POINT_DBZ = 20;
/** Weather around is dry, or as good, below this. Common practice counts from 10 dBZ. */
const DRY_DBZ = 10;
/** Correlation of what cannot be weather, and speed of what stands still while all around moves. */
const STATIC_RHOHV = 0.8;
const STILL_M_PER_S = 1;
const MOVING_M_PER_S = 2;
/** Echo in place varies less than rain that comes and goes. House rule. */
const WIDEST_SPREAD_DB = 8;
const NARROWEST_SPREAD_DB = 2;

/** Rounds by gate that can tell whether something stands there, and those that show it: votes. */
class Votes {
  readonly told: Uint16Array;
  readonly count: Uint16Array;
  /** Sums of reflectivity in tenths of a dB, and of its squares: whole numbers add up the same in any order. */
  readonly sums: Int32Array;
  readonly squares: Int32Array;
  /** Seconds since 1970. */
  readonly firstS: Uint32Array;
  readonly lastS: Uint32Array;

  constructor(gates: number) {
    this.told = new Uint16Array(gates);
    this.count = new Uint16Array(gates);
    this.sums = new Int32Array(gates);
    this.squares = new Int32Array(gates);
    this.firstS = new Uint32Array(gates).fill(0xffffffff);
    this.lastS = new Uint32Array(gates);
  }

  tell(place: number): void {
    this.told[place] = (this.told[place] as number) + 1;
  }

  vote(place: number, dbz: number, timeS: number): void {
    this.tell(place);
    const tenths = Math.max(-1000, Math.min(1000, Math.round(10 * dbz)));
    this.count[place] = (this.count[place] as number) + 1;
    this.sums[place] = (this.sums[place] as number) + tenths;
    this.squares[place] = (this.squares[place] as number) + tenths * tenths;
    this.firstS[place] = Math.min(this.firstS[place] as number, timeS);
    this.lastS[place] = Math.max(this.lastS[place] as number, timeS);
  }

  /** Gates that show it often and long enough and keep their strength: up to the mean and twice the spread. */
  settle(rounds: number, spanS: number): FixedEcho {
    const places: number[] = [];
    const upToDbz: number[] = [];
    const share: number[] = [];
    for (let place = 0; place < this.count.length; place++) {
      const count = this.count[place] as number;
      const told = this.told[place] as number;
      if (count < STATIC_SHARE * told || count < OF_ALL_SHARE * rounds) continue;
      const heldS = (this.lastS[place] as number) - (this.firstS[place] as number);
      if (heldS < SPAN_SHARE * spanS) continue;
      const mean = (this.sums[place] as number) / count / 10;
      const spread = Math.sqrt(Math.max(0, (this.squares[place] as number) / count / 100 - mean * mean));
      if (spread > WIDEST_SPREAD_DB) continue;
      places.push(place);
      upToDbz.push(mean + 2 * Math.max(NARROWEST_SPREAD_DB, spread));
      share.push(count / told);
    }
    return {
      places: Int32Array.from(places),
      upToDbz: Float32Array.from(upToDbz),
      share: Float64Array.from(share),
    };
  }
}

/** What was counted of one elevation and geometry. */
class Tally {
  readonly geometry: SweepGeometry;
  readonly ground: Votes;
  readonly points: Votes;
  rounds = 0;
  firstS = Number.POSITIVE_INFINITY;
  lastS = Number.NEGATIVE_INFINITY;

  constructor(geometry: SweepGeometry) {
    this.geometry = geometry;
    const gates = geometry.slotCount * geometry.gateCount;
    this.ground = new Votes(gates);
    this.points = new Votes(gates);
  }

  settle(): LearnedSweep {
    const spanS = this.lastS - this.firstS;
    return {
      ...this.geometry,
      rounds: this.rounds,
      static: this.ground.settle(this.rounds, spanS),
      points: this.points.settle(this.rounds, spanS),
    };
  }
}

/**
 * Learns which echo stays in place over a run, from some rounds of it.
 *
 * A gate is static where, in at least half of the rounds that can tell, it stands out from the gates 2 km around
 * it, or correlates as no weather does, or stands still while all around moves. Rounds with rain around and
 * nothing that shows cannot tell. Steady rain does not stand out, and a slow shower does not stay.
 *
 * Source of the principle (frequency of echo in dry weather): Steiner and Smith (2002), J. Atmos. Oceanic Technol.
 * 19, 673-686; thresholds common practice or house rules as given at each.
 */
export class StaticEchoLearner {
  readonly #tallies: Tally[] = [];

  /** @param echo - a sweep of the run; the order of sweeps does not matter */
  add(echo: PolarEcho): void {
    const geometry = geometryOf(echo.header, echo.azimuthDeg.length);
    let tally = this.#tallies.find((known) => isSameGeometry(known.geometry, geometry));
    if (tally === undefined) {
      tally = new Tally(geometry);
      this.#tallies.push(tally);
    }
    tally.rounds++;
    const timeS = secondsOf(echo);
    tally.firstS = Math.min(tally.firstS, timeS);
    tally.lastS = Math.max(tally.lastS, timeS);
    const view = viewSweep(echo);
    const around = placesAround(view);
    for (let ray = 0; ray < view.rayCount; ray++) {
      const slot = slotOf(echo.azimuthDeg[ray] as number, geometry.slotCount);
      for (let gate = 0; gate < view.gateCount; gate++) {
        countGate(tally, view, around, ray, gate, slot * view.gateCount + gate);
      }
    }
  }

  /** @returns elevations in ascending order; those with too few rounds are left out */
  finish(): LearnedStaticEcho {
    const sweeps = this.#tallies
      .filter(({ rounds }) => rounds >= ENOUGH_ROUNDS)
      .map((tally) => tally.settle());
    // In an order that does not tell which sweep came first.
    sweeps.sort(
      (a, b) =>
        a.elevationDeg - b.elevationDeg ||
        a.slotCount - b.slotCount ||
        a.gateCount - b.gateCount ||
        a.gateLengthM - b.gateLengthM ||
        a.firstGateCentreM - b.firstGateCentreM,
    );
    return { sweeps };
  }
}

/** Steps to eight places around a gate: rays by gate, shape [gateCount]; gates, one number. */
function placesAround({ gateCount, echo: { header }, rayStepDeg, rayCount }: SweepView): {
  raysAway: Uint16Array;
  gatesAway: number;
} {
  const gatesAway = Math.max(2, Math.round(AROUND_M / header.gateLengthM));
  const raysAway = Uint16Array.from({ length: gateCount }, (_, gate) => {
    const rayApartM = ((header.firstGateCentreM + gate * header.gateLengthM) * rayStepDeg * Math.PI) / 180;
    const away = Math.max(2, Math.round(AROUND_M / Math.max(1, rayApartM)));
    return Math.min(away, Math.max(1, rayCount >> 3));
  });
  return { raysAway, gatesAway };
}

function countGate(
  tally: Tally,
  view: SweepView,
  { raysAway, gatesAway }: { raysAway: Uint16Array; gatesAway: number },
  ray: number,
  gate: number,
  place: number,
): void {
  const { echo, gateCount } = view;
  const { measuredDbz, rhohv, velocityMPerS } = echo;
  const at = ray * gateCount + gate;
  const dbz = measuredDbz[at] as number;
  if (Number.isNaN(dbz)) return;
  let seen = 0;
  let weaker = 0;
  let muchWeaker = 0;
  let dry = 0;
  let leaving = 0;
  let coming = 0;
  const away = raysAway[gate] as number;
  for (let side = -1; side <= 1; side++) {
    const beside = rayBeside(view, ray, side * away);
    if (beside < 0) continue;
    for (let along = -1; along <= 1; along++) {
      if (side === 0 && along === 0) continue;
      const other = gate + along * gatesAway;
      // Before the first gate and behind the last nothing is known.
      if (other < 0 || other >= gateCount) continue;
      const index = beside * gateCount + other;
      const value = measuredDbz[index] as number;
      if (Number.isNaN(value)) continue;
      seen++;
      if (value <= dbz - OUTSTANDING_DB) weaker++;
      if (value <= dbz - POINT_OUTSTANDING_DB) muchWeaker++;
      if (value < DRY_DBZ) dry++;
      if (velocityMPerS !== undefined) {
        const speed = velocityMPerS[index] as number;
        if (speed > MOVING_M_PER_S) leaving++;
        else if (speed < -MOVING_M_PER_S) coming++;
      }
    }
  }
  const enough = Math.max(3, (seen * ENOUGH_PLACES) / PLACES);
  const isEcho = dbz > Number.NEGATIVE_INFINITY;
  // Where rain to one side leaves and to the other comes, the wind blows across the beam and rain stands still too.
  const isMovingAround = leaving >= enough || coming >= enough;
  const own = velocityMPerS === undefined ? Number.NaN : (velocityMPerS[at] as number);
  const isVote =
    isEcho &&
    (weaker >= enough ||
      (rhohv !== undefined && (rhohv[at] as number) < STATIC_RHOHV) ||
      (isMovingAround && own > -STILL_M_PER_S && own < STILL_M_PER_S));
  const timeS = secondsOf(echo);
  if (isVote) tally.ground.vote(place, dbz, timeS);
  else if (dry >= enough) tally.ground.tell(place);
  if (isEcho && dbz >= POINT_DBZ && muchWeaker >= enough) tally.points.vote(place, dbz, timeS);
  else if (dry >= enough) tally.points.tell(place);
}

function secondsOf({ header }: PolarEcho): number {
  return Math.round(header.startEpochMs / 1000);
}
