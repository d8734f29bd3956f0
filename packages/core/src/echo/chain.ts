import { effectiveRadiusM } from "../beam.ts";
import type { SweepHeader } from "../model/radar.ts";
import type { AttenuationSettings } from "./attenuation/attenuation-settings.ts";
import { type AttenuationReport, correctAttenuation } from "./attenuation/correct-attenuation.ts";
import {
  correctGas,
  GasLosses,
  type GasMode,
  type GasReport,
  type StationAir,
  surfaceAirOf,
} from "./attenuation/correct-gas.ts";
import type { LearnedAttenuation } from "./attenuation/learned.ts";
import { type PhaseReport, workUpPhase } from "./attenuation/rain-phase.ts";
import type { LearnedBlockage } from "./blockage/blockage-learner.ts";
import { type BlockageSettings, correctBlockage, joinBlockage } from "./blockage/correct-blockage.ts";
import { terrainBlockage } from "./blockage/terrain-blockage.ts";
import type { TerrainRays } from "./blockage/terrain-model.ts";
import type { ConsistencyEstimate } from "./calibration/consistency-learner.ts";
import { addEffect, type MeasuredEcho, type PolarEcho } from "./polar-echo.ts";
import { correctProfile, type ProfileReport, type ProfileSettings } from "./profile/correct-profile.ts";
import type { LearnedProfile } from "./profile/learned-profile.ts";
import type { LearnedDropNumber } from "./rain-rate/drop-number.ts";
import type { LearnedDropSize } from "./rain-rate/drop-size.ts";
import { screenSweep } from "./screening/screen-sweep.ts";
import type { ScreeningReport, ScreeningSettings } from "./screening/settings.ts";
import type { LearnedStaticEcho } from "./screening/static-echo.ts";

/** What is done to an echo before it becomes rain. A step that is undefined is not taken. */
export interface EchoSettings {
  /** Calibration: added to every reflectivity, dB. */
  readonly offsetDb: number;
  /** Taken where the files give none. */
  readonly beamWidthDeg: number;
  readonly effectiveRadiusFactor: number;
  readonly screening: ScreeningSettings | undefined;
  readonly blockage: BlockageSettings | undefined;
  readonly gas: { readonly mode: GasMode; readonly air: StationAir } | undefined;
  readonly attenuation: AttenuationSettings | undefined;
  readonly profile: ProfileSettings | undefined;
}

/** What a run learned of one radar before its units of work. Whatever is undefined could not be told. */
export interface LearnedEcho {
  /** Rounds that it was learned from. */
  readonly roundCount: number;
  readonly staticEcho: LearnedStaticEcho | undefined;
  /** From a terrain model of the user's. */
  readonly terrain: TerrainRays | undefined;
  readonly blockage: LearnedBlockage | undefined;
  readonly attenuation: LearnedAttenuation;
  readonly profile: LearnedProfile | undefined;
  /** How much too high the radar's ZDR is; 0 where the scans do not tell. */
  readonly zdrOffsetDb: number;
  readonly dropNumber: LearnedDropNumber | undefined;
  /** Of all radars of the run that tell of it. */
  readonly dropSize: LearnedDropSize | undefined;
  /** How much more the radar shows than its own Z, ZDR and PHIDP allow; proposed, never applied. */
  readonly consistency: ConsistencyEstimate | undefined;
}

export const NOTHING_LEARNED: LearnedEcho = {
  roundCount: 0,
  staticEcho: undefined,
  terrain: undefined,
  blockage: undefined,
  attenuation: {},
  profile: undefined,
  zdrOffsetDb: 0,
  dropNumber: undefined,
  dropSize: undefined,
  consistency: undefined,
};

/** What each step did to a sweep; undefined where it was not taken. */
export interface EchoReport {
  readonly screening: ScreeningReport | undefined;
  readonly blockage: { readonly corrected: number; readonly lost: number } | undefined;
  readonly gas: GasReport | undefined;
  readonly phase: PhaseReport | undefined;
  readonly attenuation: AttenuationReport | undefined;
}

/** Shares of blockage kept by geometry; antennas that wander make a geometry a sweep. */
const KEPT_GEOMETRIES = 48;

/**
 * The steps from a measured echo to one that may become rain, for one radar, in this order: screening, calibration,
 * blockage, gas, attenuation by rain, and, once the rain type is known, the vertical profile.
 *
 * False echo must be out before anything is summed along a ray; terrain and air do not depend on rain; rain's loss
 * needs what they took given back; the profile is the last, since it is a matter of what falls below the beam.
 */
export class EchoChain {
  readonly #settings: EchoSettings;
  readonly #learned: LearnedEcho;
  readonly #radiusM: number;
  readonly #gas: GasLosses | undefined;
  /** By geometry, the one asked for first first. */
  readonly #blockage: { readonly of: Geometry; readonly fraction: Float32Array | undefined }[] = [];

  /** @throws RangeError where the air of the settings cannot be */
  constructor(settings: EchoSettings, learned: LearnedEcho) {
    this.#settings = settings;
    this.#learned = learned;
    this.#radiusM = effectiveRadiusM(settings.effectiveRadiusFactor);
    this.#gas =
      settings.gas === undefined ? undefined : new GasLosses(surfaceAirOf(settings.gas.air), this.#radiusM);
  }

  /**
   * All steps up to the rain type.
   *
   * @param above - the sweep above, as measured; undefined where there is none
   */
  correct(echo: PolarEcho, above: MeasuredEcho | undefined): EchoReport {
    const { offsetDb, screening, blockage, gas, attenuation, profile } = this.#settings;
    const learned = this.#learned;
    const screened =
      screening === undefined ? undefined : screenSweep(echo, above, learned.staticEcho, screening);
    if (offsetDb !== 0) addEffect(echo, "calibration", new Float32Array(echo.dbz.length).fill(offsetDb));
    const fraction = blockage === undefined ? undefined : this.#blockedFraction(echo);
    const blocked =
      blockage === undefined || fraction === undefined
        ? undefined
        : correctBlockage(echo, fraction, blockage);
    const air =
      gas === undefined || this.#gas === undefined
        ? undefined
        : correctGas(echo, this.#gas, gas.mode, alreadyGivenBack(echo.header));
    // KDP is of use to the rain rate too, whether or not attenuation is corrected.
    const phase = workUpPhase(echo, learned.attenuation);
    const layer = profile === undefined ? undefined : learned.profile?.layer;
    const rain =
      attenuation === undefined
        ? undefined
        : correctAttenuation(echo, learned.attenuation, {
            ...attenuation,
            meltingLayer: attenuation.meltingLayer ?? layer,
          });
    return { screening: screened, blockage: blocked, gas: air, phase, attenuation: rain };
  }

  /**
   * The last step: what the beam sees aloft is brought to the ground.
   *
   * @param rainType - by gate; undefined takes all rain for widespread
   */
  bringDown(echo: PolarEcho, rainType: Uint8Array | undefined): ProfileReport | undefined {
    const { profile } = this.#settings;
    const learned = this.#learned.profile;
    return profile === undefined || learned === undefined
      ? undefined
      : correctProfile(echo, learned, rainType, profile);
  }

  /** Share of the beam that is hidden, by gate; undefined where nothing is hidden or known. */
  #blockedFraction(echo: PolarEcho): Float32Array | undefined {
    const { terrain, blockage } = this.#learned;
    if (terrain === undefined && blockage === undefined) return undefined;
    const known = this.#blockage.find(({ of }) => isSameGeometry(of, echo));
    if (known !== undefined) return known.fraction;
    const { header, azimuthDeg } = echo;
    const sweep = {
      elevationDeg: header.elevationDeg,
      azimuthDeg,
      gateCount: header.gateCount,
      firstGateCentreM: header.firstGateCentreM,
      gateLengthM: header.gateLengthM,
      beamWidthDeg: header.beamWidthDeg?.vertical ?? this.#settings.beamWidthDeg,
      antennaHeightM: header.site.antennaHeightM,
    };
    const byTerrain = terrain === undefined ? undefined : terrainBlockage(terrain, sweep, this.#radiusM);
    const { fraction } = joinBlockage(sweep, byTerrain, blockage);
    const found = fraction.some((share) => share > 0) ? fraction : undefined;
    if (this.#blockage.length >= KEPT_GEOMETRIES) this.#blockage.shift();
    this.#blockage.push({ of: geometryOf(echo), fraction: found });
    return found;
  }
}

/** Whether the sender gave back what air takes; undefined where the file does not say. */
function alreadyGivenBack({ gasAttenuationDbPerKm }: SweepHeader): boolean | undefined {
  return gasAttenuationDbPerKm === undefined ? undefined : gasAttenuationDbPerKm > 0;
}

/** What places the gates of a sweep: numbers alone, since a header may hold all that was decoded with it. */
type Geometry = Pick<SweepHeader, "elevationDeg" | "gateCount" | "firstGateCentreM" | "gateLengthM"> &
  Pick<PolarEcho, "azimuthDeg">;

function geometryOf({ header, azimuthDeg }: PolarEcho): Geometry {
  const { elevationDeg, gateCount, firstGateCentreM, gateLengthM } = header;
  return { elevationDeg, gateCount, firstGateCentreM, gateLengthM, azimuthDeg };
}

function isSameGeometry(one: Geometry, { header, azimuthDeg }: PolarEcho): boolean {
  return (
    one.elevationDeg === header.elevationDeg &&
    one.gateCount === header.gateCount &&
    one.firstGateCentreM === header.firstGateCentreM &&
    one.gateLengthM === header.gateLengthM &&
    one.azimuthDeg.length === azimuthDeg.length &&
    one.azimuthDeg.every((azimuth, ray) => azimuth === azimuthDeg[ray])
  );
}
