import {
  ATTENUATION_CORRECTION_ENTRIES,
  type CheckValue,
  inputNumber,
  inputNumbers,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import { type AttenuationLaw, attenuationOfZOneWayDbPerKm } from "../../rain-attenuation.ts";
import { wavelengthM } from "../../units.ts";
import {
  type GateShare,
  gateByGateLossTwoWayDb,
  hitschfeldBordanBracket,
  hitschfeldBordanErrorDb,
  lossOfBracketTwoWayDb,
  runawayLossTwoWayDb,
} from "./hitschfeld-bordan.ts";
import { lossOfPhaseTwoWayDb, phaseCoefficients } from "./phase-coefficients.ts";
import { zphiAttenuationOneWayDbPerKm, zphiConstant } from "./zphi.ts";

/** Fine enough that the trapezoids below err by less than the tolerances of the entries. */
const STEPS = 40_000;

function lawOf(entry: CheckValue): AttenuationLaw {
  const coefficient = "a" in entry.inputs ? inputNumber(entry, "a") : inputNumber(entry, "alpha_k");
  return { coefficient, exponent: inputNumber(entry, "b" in entry.inputs ? "b" : "beta") };
}

/** A path through rain that is known: true and measured echo, loss, and integral of k of the measured echo. */
function pathThrough(trueDbz: (km: number) => number, pathKm: number, law: AttenuationLaw) {
  const stepKm = pathKm / STEPS;
  const trueK = (km: number) => attenuationOfZOneWayDbPerKm(trueDbz(km), law);
  let lossDb = 0;
  let integral = 0;
  let measuredK = trueK(0);
  const integrals = [0];
  const losses = [0];
  for (let step = 1; step <= STEPS; step++) {
    const km = step * stepKm;
    lossDb += stepKm * (trueK(km - stepKm) + trueK(km));
    const here = attenuationOfZOneWayDbPerKm(trueDbz(km) - lossDb, law);
    integral += 0.5 * stepKm * (measuredK + here);
    measuredK = here;
    integrals.push(integral);
    losses.push(lossDb);
  }
  return { lossDb, losses, integral, integrals, measuredDbz: trueDbz(pathKm) - lossDb };
}

/** "25 + 25*exp(-((r_km-10)/4)^2)" as a function. */
function profileOf(entry: CheckValue): (km: number) => number {
  const text = String(entry.inputs.true_profile_dBZ);
  const parts = /^([\d.]+) \+ ([\d.]+)\*exp\(-\(\(r_km-([\d.]+)\)\/([\d.]+)\)\^2\)$/.exec(text);
  if (parts === null) throw new RangeError(`${entry.id} has a profile of another form: ${text}`);
  const [base, top, middle, width] = parts.slice(1).map(Number) as [number, number, number, number];
  return (km) => base + top * Math.exp(-(((km - middle) / width) ** 2));
}

function cell(entry: CheckValue) {
  const lengthKm = inputNumber(entry, "path_km" in entry.inputs ? "path_km" : "range_km");
  return pathThrough(profileOf(entry), lengthKm, lawOf(entry));
}

function uniform(entry: CheckValue) {
  return pathThrough(() => inputNumber(entry, "true_dBZ"), inputNumber(entry, "range_km"), lawOf(entry));
}

function recoveredDbz(entry: CheckValue, { integral, measuredDbz }: ReturnType<typeof pathThrough>): number {
  const { exponent } = lawOf(entry);
  return measuredDbz + lossOfBracketTwoWayDb(hitschfeldBordanBracket(integral, exponent), exponent);
}

function gateByGate(entry: CheckValue, share: GateShare): Float64Array {
  return gateByGateLossTwoWayDb(
    inputNumbers(entry, "measured_dBZ"),
    inputNumber(entry, "gate_km"),
    lawOf(entry),
    share,
  );
}

function gateDbz(entry: CheckValue, gate: number, share: GateShare): number {
  return (inputNumbers(entry, "measured_dBZ")[gate] as number) + (gateByGate(entry, share)[gate] as number);
}

const FREQUENCY_HZ: Readonly<Record<string, number>> = { S: 2.8e9, C: 5.6e9, X: 9.4e9 };

runReferenceSuite({
  topics: ["e-rain-attenuation"],
  only: ATTENUATION_CORRECTION_ENTRIES,
  adapters: [
    [
      "hb-uniform-bracket",
      (entry) => hitschfeldBordanBracket(uniform(entry).integral, lawOf(entry).exponent),
    ],
    ["hb-uniform-recovered", (entry) => recoveredDbz(entry, uniform(entry))],
    ["hb-cell-pia", (entry) => cell(entry).lossDb],
    ["hb-cell-zm20", (entry) => cell(entry).measuredDbz],
    ["hb-cell-recovered", (entry) => recoveredDbz(entry, cell(entry))],
    [
      "hb-blowup-*",
      (entry) => runawayLossTwoWayDb(inputNumber(entry, "calibration_error_dB"), inputNumber(entry, "beta")),
    ],
    [
      "hb-error-growth*",
      (entry) =>
        hitschfeldBordanErrorDb(
          inputNumber(entry, "calibration_error_dB"),
          inputNumber(entry, "true_two_way_PIA_dB"),
          inputNumber(entry, "beta"),
        ),
    ],
    ["gbg-explicit-gate*", (entry) => gateDbz(entry, inputNumber(entry, "gate"), "before-gate")],
    ["gbg-explicit-pia", (entry) => gateByGate(entry, "before-gate").at(-1)],
    ["gbg-halfgate-last", (entry) => gateDbz(entry, 3, "to-gate-centre")],
    [
      "phidp-alpha-*",
      (entry) =>
        phaseCoefficients(wavelengthM(FREQUENCY_HZ[String(entry.inputs.band)] as number))?.loss.dbPerDeg,
    ],
    [
      "phidp-lin-*",
      (entry) =>
        lossOfPhaseTwoWayDb(
          inputNumber(entry, "phidp_minus_offset_deg"),
          inputNumber(entry, "alpha_dB_per_deg"),
        ),
    ],
    [
      "zphi-uniform",
      (entry) => {
        // Even rain before its loss: any Z does, for ZPHI knows no calibration.
        const lossDb = inputNumber(entry, "alpha_dB_per_deg") * inputNumber(entry, "delta_phidp_deg");
        const pathKm = inputNumber(entry, "path_km");
        const exponent = inputNumber(entry, "b");
        const attenuatedZToB = (km: number) => 10 ** (-0.1 * exponent * lossDb * (km / pathKm));
        const stepKm = pathKm / STEPS;
        let whole = 0;
        let half = 0;
        for (let step = 0; step < STEPS; step++) {
          if (step * 2 === STEPS) half = whole;
          whole += 0.5 * stepKm * (attenuatedZToB(step * stepKm) + attenuatedZToB((step + 1) * stepKm));
        }
        return zphiAttenuationOneWayDbPerKm(
          attenuatedZToB(pathKm / 2),
          whole,
          half / whole,
          zphiConstant(lossDb, exponent),
          exponent,
        );
      },
    ],
    ["zphi-cell-dphi", (entry) => cell(entry).lossDb / inputNumber(entry, "alpha_dB_per_deg")],
    [
      "zphi-cell-peak",
      (entry) => {
        const path = cell(entry);
        const law = lawOf(entry);
        const place = Math.round((STEPS * inputNumber(entry, "range_km")) / inputNumber(entry, "path_km"));
        const attenuatedDbz =
          profileOf(entry)(inputNumber(entry, "range_km")) - (path.losses[place] as number);
        return zphiAttenuationOneWayDbPerKm(
          10 ** (0.1 * law.exponent * attenuatedDbz),
          path.integral / law.coefficient,
          (path.integrals[place] as number) / path.integral,
          zphiConstant(path.lossDb, law.exponent),
          law.exponent,
        );
      },
    ],
  ],
});
