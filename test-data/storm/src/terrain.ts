/** A long hill: where its middle lies, which way its crest runs, how high it stands. */
export interface Ridge {
  readonly xKm: number;
  readonly yKm: number;
  /** Direction of the crest, clockwise from north. */
  readonly crestAzimuthDeg: number;
  readonly crestSigmaKm: number;
  readonly flankSigmaKm: number;
  readonly heightM: number;
}

/** The invented ground: a low moor that rises to the north-west, and its ridges. Metres above sea level. */
export function terrainM(xKm: number, yKm: number, ridges: readonly Ridge[]): number {
  const rise = 14 / (1 + Math.exp((xKm - yKm + 30) / 18));
  let heightM = 6 + rise + 2 * Math.sin(xKm / 5.3) * Math.cos(yKm / 6.1);
  for (const ridge of ridges) {
    const angle = (ridge.crestAzimuthDeg * Math.PI) / 180;
    const east = xKm - ridge.xKm;
    const north = yKm - ridge.yKm;
    const along = (east * Math.sin(angle) + north * Math.cos(angle)) / ridge.crestSigmaKm;
    const across = (east * Math.cos(angle) - north * Math.sin(angle)) / ridge.flankSigmaKm;
    heightM += ridge.heightM * Math.exp(-0.5 * (along * along + across * across));
  }
  return heightM;
}
