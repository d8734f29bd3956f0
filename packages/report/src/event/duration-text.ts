/** "5 min", "90 min", "2 h", "7 d": a duration as tables head it. */
export function durationText(minutes: number): string {
  if (minutes >= 2880 && minutes % 1440 === 0) return `${minutes / 1440} d`;
  return minutes >= 60 && minutes % 60 === 0 ? `${minutes / 60} h` : `${minutes} min`;
}
