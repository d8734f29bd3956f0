/** What a run, a neighbour radar or a person can teach the correction of attenuation. All of it optional. */
export interface LearnedAttenuation {
  /** Two-way loss of ZH per degree of rain's PHIDP; 0 where the sender has corrected the echo already. */
  readonly alphaDbPerDeg?: number | undefined;
  /** Two-way loss of ZDR per degree of rain's PHIDP. */
  readonly differentialDbPerDeg?: number | undefined;
  /** Times the coefficient of the law k = a Z^b that Hitschfeld-Bordan uses, above 0. */
  readonly hitschfeldBordanFactor?: number | undefined;
  /** PHIDP where no rain lies between, modulo the fold. */
  readonly systemPhaseDeg?: number | undefined;
}
