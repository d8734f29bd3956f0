/** What was met in gauge files, for the manifest. Numbers of rows or readings unless said otherwise. */
export interface GaugeFileCounts {
  files: number;
  gauges: number;
  /** Rows under the header, blank lines left out. */
  rows: number;
  /** Cells that hold a number, before any check. */
  values: number;
  missing: number;
  malformedRows: number;
  unreadableStamps: number;
  unreadableValues: number;
  /** Negative, or more than 50 mm in a minute. */
  impossible: number;
  duplicatesSame: number;
  duplicatesDifferent: number;
  outOfOrder: number;
  /** Stamps less than 10 ms off a whole minute, taken for it. */
  stampsSnapped: number;
  /** Values like "<0.2", taken as 0 (or as missing, where the plan says so). */
  belowDetection: number;
  /** Values like "T", rain too little to measure, taken as 0. */
  traces: number;
  /** Readings that the network marks as covering all the time since the gauge's last value. */
  accumulated: number;
  /** Stamps in an hour that the clock skipped: left out. */
  skippedHour: number;
  /** Stamps in an hour that the clock repeated: told apart by their order, or left out. */
  repeatedHourResolved: number;
  repeatedHourLeftOut: number;
  /** Stamps whose own offset is not the zone's. */
  offsetContradicts: number;
  qualityDoubt: number;
  qualityDrop: number;
  qualityUnmapped: number;
  counterResets: number;
  counterRollovers: number;
  counterJitter: number;
  /** Levels far off that the next reading did not bear out. */
  counterOutliers: number;
  /** Increments of a counter that cover more than one step. */
  counterGapTotals: number;
  /** Readings cut short because the one before ended within their step. */
  overlapping: number;
  /** Readings of gauges whose step cannot be told: left out. */
  stepUnknown: number;
  /** Hours, summed over the gauges, that count as dry because no row says otherwise. */
  silentDryHours: number;
}

export function noGaugeFileCounts(): GaugeFileCounts {
  return {
    files: 0,
    gauges: 0,
    rows: 0,
    values: 0,
    missing: 0,
    malformedRows: 0,
    unreadableStamps: 0,
    unreadableValues: 0,
    impossible: 0,
    duplicatesSame: 0,
    duplicatesDifferent: 0,
    outOfOrder: 0,
    stampsSnapped: 0,
    belowDetection: 0,
    traces: 0,
    accumulated: 0,
    skippedHour: 0,
    repeatedHourResolved: 0,
    repeatedHourLeftOut: 0,
    offsetContradicts: 0,
    qualityDoubt: 0,
    qualityDrop: 0,
    qualityUnmapped: 0,
    counterResets: 0,
    counterRollovers: 0,
    counterJitter: 0,
    counterOutliers: 0,
    counterGapTotals: 0,
    overlapping: 0,
    stepUnknown: 0,
    silentDryHours: 0,
  };
}
