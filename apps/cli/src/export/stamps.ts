/** An instant on a clock that is always so many minutes ahead of UTC: 2031-05-20T13:05:00+01:00, or with Z. */
export function stampText(epochMs: number, offsetMinutes: number): string {
  const iso = new Date(epochMs + offsetMinutes * 60_000).toISOString().slice(0, 19);
  return `${iso}${offsetMinutes === 0 ? "Z" : offsetText(offsetMinutes)}`;
}

/** +01:00, -03:30. */
export function offsetText(offsetMinutes: number): string {
  const minutes = Math.abs(offsetMinutes);
  const two = (count: number) => String(count).padStart(2, "0");
  return `${offsetMinutes < 0 ? "-" : "+"}${two(Math.floor(minutes / 60))}:${two(minutes % 60)}`;
}
