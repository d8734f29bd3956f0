import {
  BLOCKAGE_SETTINGS,
  DEFAULT_ATTENUATION_SETTINGS,
  type EchoSettings,
  POLARIMETRIC_RATE_DEFAULTS,
  PROFILE_DEFAULTS,
} from "@rainreckon/core";
import type { Plan, PlanRadar } from "../plan/schema.ts";
import { relationOf } from "./conversion.ts";
import type { JobEcho, JobRadar, JobSensitivity } from "./job.ts";

/**
 * How the plan wants the echo of a radar to be worked on.
 *
 * @returns undefined where no step is taken, so that stored numbers may go straight to rain
 */
export function echoSettings(
  plan: Plan,
  radar: PlanRadar,
  job: Omit<JobRadar, "echo">,
  sensitivity: JobSensitivity | undefined,
): EchoSettings | undefined {
  const { screening, blockage, gas, attenuation, profile, rate } = plan.echo;
  const steps = [
    screening.use,
    blockage.use,
    gas.use !== "never",
    attenuation.method !== "none",
    profile.use,
    rate.rainType,
    rate.polarimetric,
    rate.hail,
  ];
  if (!steps.includes(true)) return undefined;
  return {
    offsetDb: radar.offsetDb,
    beamWidthDeg: job.beamWidthDeg,
    effectiveRadiusFactor: plan.rain.effectiveRadiusFactor,
    screening: screening.use ? { off: screening.without, fill: screening.fill } : undefined,
    blockage: blockage.use ? { ...BLOCKAGE_SETTINGS, maxFraction: blockage.limit } : undefined,
    gas:
      gas.use === "never"
        ? undefined
        : {
            mode: gas.use === "always" ? "on" : "auto",
            air: {
              temperatureC: gas.temperatureC,
              pressureHPa: gas.pressureHpa,
              relativeHumidityPercent: gas.humidityPercent,
            },
          },
    attenuation:
      attenuation.method === "none"
        ? undefined
        : {
            ...DEFAULT_ATTENUATION_SETTINGS,
            method: attenuation.method,
            detectableAt1KmDbz: sensitivity?.at1KmDbz,
          },
    profile: profile.use
      ? {
          ...PROFILE_DEFAULTS,
          beamWidthDeg: job.beamWidthDeg,
          radiusFactor: plan.rain.effectiveRadiusFactor,
        }
      : undefined,
  };
}

/** What the plan says of rain rates beside the relation of each radar. */
export function rateSettings({ echo: { rate } }: Plan): JobEcho["rate"] {
  const { convective, stratiform, polarimetric, hail } = rate;
  const none = {
    dropNumber: false,
    dropSize: false,
    hail: false,
    kdpShare: 0,
    kdpZdrPart: 0,
    zZdrShare: 0,
    attenuationShare: 0,
  };
  return {
    convective: convective === undefined ? undefined : relationOf(convective),
    stratiform: stratiform === undefined ? undefined : relationOf(stratiform),
    polarimetric:
      polarimetric || hail ? { ...(polarimetric ? POLARIMETRIC_RATE_DEFAULTS : none), hail } : undefined,
  };
}
