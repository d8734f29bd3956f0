import {
  antennaGainDb,
  bandOfWavelength,
  beamWidthOfDishDeg,
  beamWidthOfGainDeg,
  frequencyHz,
  InputError,
  type MeasuredSensitivity,
  wavelengthM,
} from "@rainreckon/core";

/** What is known of a radar before anything is worked out; what is not known is left out. */
export interface KnownRadar {
  readonly name: string;
  readonly origin: string;
  readonly wavelengthM?: number | undefined;
  readonly beamWidthDeg?: { readonly horizontal: number; readonly vertical: number } | undefined;
  readonly antennaGainDb?: number | undefined;
  readonly peakPowerW?: number | undefined;
  readonly pulseLengthS?: number | undefined;
  /** Depth of a gate where the pulse length is not known. */
  readonly gateLengthM?: number | undefined;
  readonly noiseFigureDb?: number | undefined;
  readonly bandwidthHz?: number | undefined;
  readonly systemLossDb?: number | undefined;
  readonly radarConstantDb?: number | undefined;
  readonly noiseEquivalentDbz?: number | undefined;
  readonly nyquistVelocityMPerS?: number | undefined;
  readonly measured?: MeasuredSensitivity | undefined;
  readonly prfHz?: number | undefined;
  readonly elevationDeg: number;
  readonly antennaHeightM?: number | undefined;
  readonly remarks: readonly string[];
}

/** Parameters of a radar as flags give them, in the units of the flags. */
export interface ParameterFlags {
  readonly peakPower?: number;
  readonly gain?: number;
  readonly beamWidth?: number;
  readonly dish?: number;
  readonly pulse?: number;
  readonly frequency?: number;
  readonly wavelength?: number;
  readonly noiseFigure?: number;
  readonly bandwidth?: number;
  readonly losses?: number;
  readonly prf?: number;
  readonly antennaHeight?: number;
  readonly elevation?: number;
}

const USUAL_ELEVATION_DEG = 0.5;
const USUAL_NOISE_FIGURE_DB = 3;

/** Invented radars of ordinary size, one a band: no real one is meant. */
const EXAMPLES: Readonly<Record<string, Omit<KnownRadar, "name" | "origin" | "remarks">>> = {
  S: example(2.8, 700_000, 45, 1, 1.6, 2),
  C: example(5.6, 250_000, 45, 1, 2, 2),
  X: example(9.4, 50_000, 42, 1.4, 0.8, 3),
};

function example(
  frequencyGHz: number,
  peakPowerW: number,
  gainDb: number,
  beamWidthDeg: number,
  pulseMicroseconds: number,
  systemLossDb: number,
): Omit<KnownRadar, "name" | "origin" | "remarks"> {
  return {
    wavelengthM: wavelengthM(frequencyGHz * 1e9),
    peakPowerW,
    antennaGainDb: gainDb,
    beamWidthDeg: { horizontal: beamWidthDeg, vertical: beamWidthDeg },
    pulseLengthS: pulseMicroseconds * 1e-6,
    systemLossDb,
    noiseFigureDb: USUAL_NOISE_FIGURE_DB,
    elevationDeg: USUAL_ELEVATION_DEG,
  };
}

/** The example radar of a band, with what flags say instead. */
export function radarOfBand(letter: string, flags: ParameterFlags): KnownRadar {
  const known: KnownRadar = {
    ...(EXAMPLES[letter] as (typeof EXAMPLES)[string]),
    name: `example ${letter}`,
    origin: "not a real radar",
    remarks: ["an invented radar of ordinary size: give its parameters for a real one"],
  };
  const radar = withFlags(known, flags);
  const band = bandOfWavelength(radar.wavelengthM as number)?.letter;
  if (band !== letter) {
    throw new InputError(
      `the frequency given lies in ${band ?? "no"} band, not in ${letter} band`,
      "--band, --frequency, --wavelength",
      "leave out --band, or the frequency",
      { kind: "usage" },
    );
  }
  return radar;
}

/** The radar that flags alone describe. @throws InputError (usage) where they give no frequency */
export function radarOfFlags(flags: ParameterFlags): KnownRadar {
  const radar = withFlags(
    { name: "given radar", origin: "command line", elevationDeg: USUAL_ELEVATION_DEG, remarks: [] },
    flags,
  );
  if (radar.wavelengthM === undefined) {
    throw new InputError(
      "no radar to reckon with",
      "command line, rainreckon budget",
      "name scan files, a band (--band S,C,X), or at least --frequency",
      { kind: "usage" },
    );
  }
  return radar;
}

/**
 * A radar with what flags say put in place of what was known, and what follows from one another filled in:
 * beam width from dish or gain, gain from beam width, bandwidth from the pulse.
 *
 * @throws InputError (usage) where two flags say the same thing twice
 */
export function withFlags(known: KnownRadar, flags: ParameterFlags): KnownRadar {
  if (flags.frequency !== undefined && flags.wavelength !== undefined)
    throw twice("--frequency", "--wavelength");
  if (flags.beamWidth !== undefined && flags.dish !== undefined) throw twice("--beam-width", "--dish");
  const remarks = [...known.remarks];
  const waveM =
    flags.frequency !== undefined
      ? wavelengthM(flags.frequency * 1e9)
      : flags.wavelength !== undefined
        ? flags.wavelength / 100
        : known.wavelengthM;
  if (known.wavelengthM !== undefined && waveM !== undefined && waveM !== known.wavelengthM) {
    remarks.push(
      `the frequency given stands in place of ${(frequencyHz(known.wavelengthM) / 1e9).toFixed(2)} GHz`,
    );
  }
  const pulseLengthS = flags.pulse === undefined ? known.pulseLengthS : flags.pulse * 1e-6;
  const peakPowerW = flags.peakPower ?? known.peakPowerW;
  let gainDb = flags.gain ?? known.antennaGainDb;
  let beam = known.beamWidthDeg;
  if (flags.beamWidth !== undefined) beam = round(flags.beamWidth);
  if (flags.dish !== undefined && waveM !== undefined) {
    beam = round(beamWidthOfDishDeg(flags.dish, waveM));
    remarks.push(`beam width from the dish: ${beam.vertical.toFixed(2)} degrees`);
  }
  if (beam === undefined && gainDb !== undefined) {
    beam = round(beamWidthOfGainDeg(gainDb));
    remarks.push(
      `beam width from the gain: ${beam.vertical.toFixed(2)} degrees, if round and without losses`,
    );
  }
  // A new beam is another antenna, whose gain the old one's says nothing of.
  const newBeam = flags.beamWidth !== undefined || flags.dish !== undefined;
  if (
    beam !== undefined &&
    flags.gain === undefined &&
    (gainDb === undefined || newBeam) &&
    peakPowerW !== undefined
  ) {
    gainDb = antennaGainDb(beam);
    remarks.push(`gain from the beam width: ${gainDb.toFixed(1)} dB, real dishes have 0.5 to 1.5 dB less`);
  }
  const bandwidthHz = flags.bandwidth === undefined ? known.bandwidthHz : flags.bandwidth * 1e6;
  return {
    ...known,
    wavelengthM: waveM,
    beamWidthDeg: beam,
    antennaGainDb: gainDb,
    peakPowerW,
    pulseLengthS,
    bandwidthHz: bandwidthHz ?? (pulseLengthS === undefined ? undefined : 1 / pulseLengthS),
    noiseFigureDb: flags.noiseFigure ?? known.noiseFigureDb,
    systemLossDb: flags.losses ?? known.systemLossDb,
    prfHz: flags.prf ?? known.prfHz,
    antennaHeightM: flags.antennaHeight ?? known.antennaHeightM,
    elevationDeg: flags.elevation ?? known.elevationDeg,
    remarks,
  };
}

function round(beamWidthDeg: number) {
  return { horizontal: beamWidthDeg, vertical: beamWidthDeg };
}

function twice(one: string, other: string): InputError {
  return new InputError(
    `${one} and ${other} say the same thing twice`,
    "command line, rainreckon budget",
    "give one of them",
    {
      kind: "usage",
    },
  );
}

/** Frequency of a radar in GHz, where its wavelength is known. */
export function frequencyGHzOf(radar: KnownRadar): number | undefined {
  return radar.wavelengthM === undefined ? undefined : frequencyHz(radar.wavelengthM) / 1e9;
}
