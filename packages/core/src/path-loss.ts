/**
 * Loss of an echo over an even path, dB BOTH ways: it is met on the way out and on the way back.
 *
 * @param oneWayDbPerKm - specific attenuation, of rain or of gases
 */
export function pathLossTwoWayDb(oneWayDbPerKm: number, pathKm: number): number {
  return 2 * oneWayDbPerKm * pathKm;
}
