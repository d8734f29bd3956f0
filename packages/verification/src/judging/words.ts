/** "12.3 mm" */
export function mm(depth: number): string {
  return `${depth.toFixed(1)} mm`;
}

/** A ratio of depths as "3.2 times" or "0.33 times". */
export function times(ratio: number): string {
  return `${ratio >= 10 ? ratio.toFixed(1) : ratio >= 0.1 ? ratio.toFixed(2) : ratio.toFixed(3)} times`;
}

/** "2031-05-20T12:05Z" */
export function utc(epochMs: number): string {
  return `${new Date(epochMs).toISOString().slice(0, 16)}Z`;
}

/** "5 min to 2031-05-20T12:05Z" */
export function span({ startEpochMs, endEpochMs }: { startEpochMs: number; endEpochMs: number }): string {
  const minutes = Number(((endEpochMs - startEpochMs) / 60_000).toFixed(2));
  return `${minutes} min to ${utc(endEpochMs)}`;
}

/** "3.5 km to the west-south-west" would be false precision: eight directions. */
export function direction(eastKm: number, northKm: number): string {
  const names = ["north", "north-east", "east", "south-east", "south", "south-west", "west", "north-west"];
  const turn = Math.atan2(eastKm, northKm) / (2 * Math.PI);
  return names[Math.round(8 * (turn < 0 ? turn + 1 : turn)) % 8] as string;
}

/** "60 min late", "5 min early" */
export function clockWords(minutesLate: number): string {
  return `${Math.abs(minutesLate)} min ${minutesLate > 0 ? "late" : "early"}`;
}
