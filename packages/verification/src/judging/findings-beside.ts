import { fromDecibels } from "../numbers.ts";
import type { Finding } from "../verdict.ts";
import { type Account, isBlockedWhole } from "./account.ts";
import { distanceKm, neighbourIndices } from "./neighbours.ts";
import type { NetworkFault } from "./networks.ts";
import { ASK_DB, radarSide } from "./radar-side.ts";
import { doubleMassBreak, rateDependence } from "./ratio-in-time.ts";
import type { ReferenceLevel } from "./reference-level.ts";
import { clockWords, direction, mm, times, utc } from "./words.ts";

/** What the radar and the other gauges say of a gauge. */
export function findingsBeside(
  account: Account,
  accounts: readonly Account[],
  reference: ReferenceLevel,
  fault: NetworkFault | undefined,
): Finding[] {
  return [
    silence(account, accounts),
    ofFactor(account, reference),
    lag(account),
    place(account),
    ofNetwork(fault),
    neighbours(account, accounts),
    impossibleDry(account, accounts),
    wetAgainstDry(account),
    rates(account, accounts),
    doubleMass(account, accounts),
    sight(account),
  ].filter((finding) => finding !== undefined);
}

function silence({ reason, subject }: Account, accounts: readonly Account[]): Finding | undefined {
  if (reason?.kind !== "silent") return undefined;
  const { silent } = reason;
  const fitting = accounts.filter(
    (other) => other.subject !== subject && other.judgeable && other.reason === undefined,
  ).length;
  const when = silent.wholeWindow
    ? "0 mm"
    : `0 mm from ${utc(silent.startEpochMs)} to ${utc(silent.endEpochMs)}`;
  return {
    check: "silence",
    speaksFor: silent.wholeWindow ? "dead" : "dies-part-way",
    numbers: { missedMm: silent.missedMm, fittingGauges: fitting },
    sentence: `${when} while the radar saw ${mm(silent.missedMm)} over it; ${fitting} other gauges agree with the radar.`,
  };
}

function ofFactor(
  { reason, subject, factor, misfit }: Account,
  reference: ReferenceLevel,
): Finding | undefined {
  if (reason?.kind !== "unit" && reason?.kind !== "blocked") return undefined;
  const { offsetDb } = reason.factor;
  const { gaugeMm, expectedMm, wetSteps } = subject.plain;
  const sentence = `Gauge ${mm(gaugeMm)}, radar ${mm(expectedMm)}: ${times(fromDecibels(offsetDb))} the gauge/radar ratio of ${reference.gauges - 1} other gauges (${fromDecibels(reference.levelDb).toFixed(2)}), and alike through ${wetSteps} wet steps.`;
  return {
    check: reason.kind === "unit" ? "unit" : "ratio over time",
    speaksFor:
      reason.kind === "unit" ? "wrong-unit" : isBlockedWhole(reason.factor) ? "blocked" : "partly-blocked",
    numbers: { offsetDb, wetSteps, misfit, misfitWithFactor: factor?.misfit ?? Number.NaN },
    sentence,
  };
}

function lag({ clock, misfit, reason }: Account): Finding | undefined {
  if (clock === undefined || reason?.kind !== "clock") return undefined;
  return {
    check: "lag",
    speaksFor: "clock-off",
    numbers: { minutesLate: clock.minutesLate, misfit, misfitShifted: clock.misfit },
    sentence: `Stamps ${clockWords(clock.minutesLate)}: so shifted the gauge fits the radar (misfit ${clock.misfit.toFixed(1)} where it is ${misfit.toFixed(1)} as it stands).`,
  };
}

function place({ place: found, misfit, reason }: Account): Finding | undefined {
  if (found === undefined || reason?.kind !== "place") return undefined;
  return {
    check: "place",
    speaksFor: "misplaced",
    numbers: { distanceKm: found.distanceKm, misfit, misfitThere: found.misfit },
    sentence: `The radar ${found.distanceKm.toFixed(0)} km to the ${direction(found.eastKm, found.northKm)} fits the gauge (misfit ${found.misfit.toFixed(1)}), the one over its place does not (${misfit.toFixed(1)}).`,
  };
}

function ofNetwork(network: NetworkFault | undefined): Finding | undefined {
  if (network === undefined) return undefined;
  const { fault, showing, judged } = network;
  const who = `${showing} of ${judged} gauges of network ${network.network}`;
  if (fault.kind === "clock") {
    return {
      check: "network clock",
      speaksFor: "network-clock",
      numbers: { minutesLate: fault.minutesLate, showing, judged },
      sentence: `${who} fit the radar once their stamps are taken to be ${clockWords(fault.minutesLate)}.`,
    };
  }
  const factor = fromDecibels(fault.offsetDb);
  return {
    check: "network unit",
    speaksFor: "network-unit",
    numbers: { factor, showing, judged },
    sentence: `${who} read ${times(factor)} what the radar and other networks say.`,
  };
}

/** Gauges that make a neighbourhood. House rule. */
const LEAST_NEIGHBOURS = 4;
const NEIGHBOUR_KM = 30;

function neighbours({ subject }: Account, accounts: readonly Account[]): Finding | undefined {
  const others = accounts
    .map((other) => ({ other, km: distanceKm(subject.evidence, other.subject.evidence) }))
    .filter(
      ({ other, km }) => other.subject !== subject && km <= NEIGHBOUR_KM && other.subject.plain.steps > 0,
    );
  if (others.length < LEAST_NEIGHBOURS || !(subject.plain.steps > 0)) return undefined;
  const depths = others.map(({ other }) => other.subject.plain.gaugeMm);
  const { quartileIndex, standsOut, buddyZ, median } = neighbourIndices(
    subject.plain.gaugeMm,
    depths,
    others.map(({ km }) => km),
  );
  if (!standsOut) return undefined;
  return {
    check: "neighbours",
    speaksFor: "unexplained",
    numbers: { quartileIndex, buddyZ, neighbours: depths.length, medianMm: median },
    sentence: `${mm(subject.plain.gaugeMm)} where ${depths.length} gauges within ${NEIGHBOUR_KM} km have ${mm(median)} in the middle; rain is local, so this alone is no ground.`,
  };
}

/** House rule h-flat-zero: zeros are suspect only where neighbours report so much. */
const NEIGHBOURS_WET_MM = 5;
const DRY_NEIGHBOUR_KM = 20;

function impossibleDry({ subject }: Account, accounts: readonly Account[]): Finding | undefined {
  if (!(subject.plain.steps > 0) || subject.plain.gaugeMm > 0) return undefined;
  const near = accounts
    .filter(
      (other) =>
        other.subject !== subject && distanceKm(subject.evidence, other.subject.evidence) <= DRY_NEIGHBOUR_KM,
    )
    .map((other) => other.subject.plain.gaugeMm)
    .filter((depth) => Number.isFinite(depth));
  if (near.length < 3) return undefined;
  const { median } = neighbourIndices(0, near, near);
  if (!(median >= NEIGHBOURS_WET_MM)) return undefined;
  return {
    check: "impossible dry",
    speaksFor: "dead",
    numbers: { neighbours: near.length, medianMm: median },
    sentence: `0 mm where ${near.length} gauges within ${DRY_NEIGHBOUR_KM} km have ${mm(median)} in the middle.`,
  };
}

/** Depth on one side in an hour in which the other had none. */
const CONTRADICTION_MM = 1;

function wetAgainstDry({ subject }: Account): Finding | undefined {
  const pairs = subject.evidence.byInterval.filter(({ used }) => used);
  const gaugeDry = pairs.filter(({ gaugeMm, radarMm }) => gaugeMm === 0 && radarMm >= CONTRADICTION_MM);
  const radarDry = pairs.filter(({ gaugeMm, radarMm }) => radarMm < 0.1 && gaugeMm >= CONTRADICTION_MM);
  if (gaugeDry.length + radarDry.length === 0) return undefined;
  return {
    check: "wet against dry",
    speaksFor: gaugeDry.length >= radarDry.length ? "dies-part-way" : "below-detection",
    numbers: { intervals: pairs.length, gaugeDry: gaugeDry.length, radarDry: radarDry.length },
    sentence: `In ${gaugeDry.length} of ${pairs.length} intervals the radar has ${CONTRADICTION_MM} mm or more and the gauge nothing; in ${radarDry.length} the other way round.`,
  };
}

function rates({ subject, reason }: Account, accounts: readonly Account[]): Finding | undefined {
  if (reason !== undefined) return undefined;
  const own = rateDependence(subject);
  if (own === undefined) return undefined;
  const others = accounts
    .filter((other) => other.subject !== subject && other.reason === undefined)
    .map((other) => rateDependence(other.subject)?.differenceDb)
    .filter((db) => db !== undefined);
  if (others.length < LEAST_NEIGHBOURS) return undefined;
  const { median, mad } = neighbourIndices(own.differenceDb, others, others);
  const beyondDb = own.differenceDb - median;
  if (!(beyondDb <= -Math.max(2, 4 * mad))) return undefined;
  return {
    check: "rate dependence",
    speaksFor: "under-reads-heavy-rain",
    numbers: { differenceDb: own.differenceDb, othersDb: median, heavySteps: own.heavySteps },
    sentence: `In ${own.heavySteps} steps of heavy rain it reads ${(-beyondDb).toFixed(1)} dB less beside the radar than in light rain, more than other gauges do.`,
  };
}

/** Gauges whose mean is the reference of a double-mass curve, the nearest ones: common practice is several. */
const MASS_NEIGHBOURS = 20;

function doubleMass({ subject, reason }: Account, accounts: readonly Account[]): Finding | undefined {
  if (reason !== undefined) return undefined;
  const others = accounts
    .filter((other) => other.subject !== subject && other.reason === undefined)
    .map(({ subject: { evidence } }) => ({ evidence, km: distanceKm(subject.evidence, evidence) }))
    .sort((one, other) => one.km - other.km)
    .slice(0, MASS_NEIGHBOURS)
    .map(({ evidence }) => evidence.byInterval);
  const found = doubleMassBreak(subject.evidence.byInterval, others);
  if (found === undefined) return undefined;
  const { factor, breakEpochMs, t } = found;
  return {
    check: "double mass",
    speaksFor: factor < 1 ? "partly-blocked" : "unexplained",
    numbers: { factor, t },
    sentence: `From ${utc(breakEpochMs)} on it reads ${times(factor)} what it read before, beside the mean of the other gauges.`,
  };
}

function sight({ subject }: Account): Finding | undefined {
  const { plain, ratioDb, evidence } = subject;
  if (!(plain.steps > 0) || Math.abs(ratioDb) < ASK_DB) return undefined;
  const side = radarSide(evidence.sight, plain.gaugeMm - plain.expectedMm, plain.expectedMm);
  if (side === undefined) return undefined;
  return { check: "radar's sight", speaksFor: side.cause, numbers: side.numbers, sentence: side.sentence };
}
