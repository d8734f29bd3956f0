import { type CalibrationProposal, type GaugeEvidence, proposeCalibration } from "@rainreckon/core";
import type { Comparison } from "./against-gauges.ts";
import type { JobRadar } from "./job.ts";
import type { PreparedRun } from "./prepare.ts";

/** Gauges that a radar's level may rest on, and the least rain of each. House rules. */
const LEAST_GAUGES = 5;
const LEAST_GAUGE_MM = 2;

/**
 * What scans and gauges together say of each radar's calibration. Proposed, never applied: who believes it writes
 * `offsetDb` into the plan.
 *
 * @returns in the order of the run's radars; empty where no echo is worked on
 */
export function calibrationProposals(
  { shape, overlaps }: PreparedRun,
  comparison: Comparison,
): readonly CalibrationProposal[] {
  const worked = shape.radars.filter(({ echo }) => echo !== undefined);
  return proposeCalibration(
    worked.map((radar) => ({
      siteId: radar.site.id,
      consistency: radar.echo?.learned.consistency,
      gauges: gaugeEvidence(radar, comparison),
    })),
    overlaps,
  );
}

/** Mean of gauge over radar in decibels, over trusted gauges that a radar speaks for most. */
function gaugeEvidence({ site, relations }: JobRadar, { gauges }: Comparison): GaugeEvidence | undefined {
  const ratios = gauges
    .filter(({ whole }) => whole.used && whole.radarId === site.id)
    .filter(({ whole }) => whole.gaugeMm >= LEAST_GAUGE_MM && whole.radarMm > 0)
    .map(({ whole }) => 10 * Math.log10(whole.gaugeMm / whole.radarMm));
  if (ratios.length < LEAST_GAUGES) return undefined;
  const ratioDb = ratios.reduce((sum, db) => sum + db, 0) / ratios.length;
  const variance = ratios.reduce((sum, db) => sum + (db - ratioDb) ** 2, 0) / (ratios.length - 1);
  return {
    ratioDb,
    standardErrorDb: Math.sqrt(variance / ratios.length),
    exponentB: relations[0].relation.b,
  };
}

/** A proposal as a sentence, with what to do; undefined where none is made. */
export function proposalWords({
  siteId,
  offsetDb,
  reason,
  words,
}: CalibrationProposal): { readonly text: string; readonly detail: string } | undefined {
  if (offsetDb === undefined) return undefined;
  const sources = [
    ...new Set(
      words.map(({ source, relativeTo }) =>
        source === "overlap"
          ? `rain seen by ${relativeTo} too`
          : source === "gauges"
            ? "gauges"
            : "its Z, ZDR and PHIDP",
      ),
    ),
  ];
  return {
    text: `Radar ${siteId} ${reason}: told by ${sources.join(", ")}. It was not corrected.`,
    detail: `To correct it, write offsetDb: ${offsetDb} more than it has now for this radar in the plan.`,
  };
}
