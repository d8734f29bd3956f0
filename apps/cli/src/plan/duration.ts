const PARTS = /^P(?:(\d+)D)?(?:T(?:(\d+)H)?(?:(\d+)M)?(?:(\d+)S)?)?$/;

/**
 * Length of an ISO 8601 duration in days, hours, minutes and seconds; a day is 24 hours.
 *
 * @returns milliseconds; NaN where the text is no such duration or its length is 0
 */
export function durationMs(text: string): number {
  const parts = PARTS.exec(text);
  if (parts === null) return Number.NaN;
  const [days = 0, hours = 0, minutes = 0, seconds = 0] = parts.slice(1).map((part) => Number(part ?? 0));
  const total = (((days * 24 + hours) * 60 + minutes) * 60 + seconds) * 1000;
  return total > 0 ? total : Number.NaN;
}
