import type { KnownUncertainty, Uncertainty } from "./uncertainty.ts";

/** What the errors are learned from and how far they reach, for people. */
export function uncertaintyWords({ model, time }: KnownUncertainty): string[] {
  const percent = (share: number) => `${(100 * share).toFixed(0)} %`;
  return [
    `From ${model.residualCount} gauges, each met by what was learned without it: at ${model.typicalDepthMm.toFixed(1)} mm and ${model.typicalDistanceKm.toFixed(1)} km from the nearest gauge the depth of a cell is off by a factor whose logarithm spreads by ${model.typicalSpread.toFixed(3)}.`,
    `The spread falls with the depth (power ${model.depthSlope.toFixed(2)}), grows with the distance to gauges (${percent(model.gaugeShare)} of its square), with beam height, loss, blockage, screened and bridged shares; what is wrong with all gauges alike adds ${percent(model.gaugesSpread)}.`,
    `Errors are alike over ${model.rangeKm.toFixed(0)} km; ${percent(time.lastingShare)} of an instant's error lasts all window long, the rest passes within ${time.hours} h.`,
  ];
}

/**
 * How sure depths are, for people who have only the files.
 *
 * @param withMembers - whether the run has members
 */
export function uncertaintyLines(uncertainty: Uncertainty, withMembers: boolean): string[] {
  if (!uncertainty.known) {
    return [
      "How sure",
      `  p10_mm and p90_mm are empty, and totals.nc has no adjusted_total_standard_error: ${uncertainty.reason}.`,
      "  Radar totals of storms that no gauge adjusts are often off by a factor of two (Wilson & Brandes 1979; from memory).",
    ];
  }
  return [
    "How sure",
    "  p10_mm, p90_mm      one true depth in ten lies below the first, one above the second: of the mean over an area, or of",
    "                      the cell of an asset. They need not lie evenly about depth_mm: errors are factors. They say",
    "                      nothing of time or area that was not observed, nor of rain that no gauge and no scan met.",
    "  adjusted_total_standard_error (totals.nc)  of the depth of each single cell, mm; errors of cells side by side are",
    "                      alike, so the error of an area is not to be had by dividing by the root of its cells.",
    ...(withMembers
      ? [
          "  members/*.nc        fields of depth by interval, each as likely as any other to be the true one: they spread as the",
          "                      standard error says, and are alike in cells side by side. What is dry stays dry in all of them.",
          "                      members_catchments.csv holds the depth of each catchment, member and interval.",
        ]
      : []),
    ...uncertaintyWords(uncertainty).map((line) => `  ${line}`),
  ];
}
