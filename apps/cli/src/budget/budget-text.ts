import { decimals, fixedDecimals } from "../ui/numbers.ts";
import { type Column, textTable } from "../ui/table.ts";
import type { Terminal } from "../ui/terminal.ts";
import type { Budget, BudgetRadar } from "./schema.ts";

const right = (head: string): Column => ({ head, align: "right" });

/** A budget for people: each radar by itself, then the rain side by side. */
export function budgetText(budget: Budget, terminal: Terminal): string {
  const { air, relation } = budget;
  const parts = [
    `Relation ${relation.name}: Z = ${relation.a} R^${relation.b}. 1 dB too much makes ${fixedDecimals(100 * (budget.oneDbRateFactor - 1), 1)} % too much rain, ` +
      `1 dB too little ${fixedDecimals(100 * (1 - 1 / budget.oneDbRateFactor), 1)} % too little.`,
    `Air at the antenna: ${decimals(air.temperatureC, 1)} °C, ${decimals(air.pressureHPa, 1)} hPa, ${decimals(air.relativeHumidityPercent, 0)} % (${fixedDecimals(air.vapourDensityGPerM3, 1)} g/m³ of vapour). ` +
      `Wet radome: ${decimals(budget.radomeLossTwoWayDb, 1)} dB both ways.`,
    ...budget.radars.map((radar) => radarText(radar, budget, terminal)),
    rainText(budget, terminal),
    dropText(budget, terminal),
  ];
  return parts.join("\n\n");
}

function radarText(radar: BudgetRadar, budget: Budget, terminal: Terminal): string {
  const beam = radar.beamWidthDeg;
  const facts = [
    radar.frequencyGHz === null
      ? undefined
      : `${radar.band === null ? "" : `${radar.band} band, `}${fixedDecimals(radar.frequencyGHz, 2)} GHz (${fixedDecimals(radar.wavelengthCm, 2)} cm)`,
    beam === null
      ? undefined
      : `beam ${decimals(beam.vertical, 2)}°${beam.horizontal === beam.vertical ? "" : ` (across ${decimals(beam.horizontal, 2)}°)`}`,
    `elevation ${decimals(radar.elevationDeg, 2)}°`,
    radar.antennaHeightAslM === null
      ? undefined
      : `antenna ${decimals(radar.antennaHeightAslM, 0)} m above the sea`,
    radar.peakPowerW === null ? undefined : `${decimals(radar.peakPowerW / 1000, 1)} kW`,
    radar.antennaGainDb === null ? undefined : `gain ${decimals(radar.antennaGainDb, 1)} dB`,
    radar.pulseLengthMicroseconds === null
      ? undefined
      : `pulse ${decimals(radar.pulseLengthMicroseconds, 2)} µs`,
    radar.radarConstantDb === null
      ? undefined
      : `radar constant ${fixedDecimals(radar.radarConstantDb, 1)} dB`,
    radar.noiseDbm === null ? undefined : `noise ${fixedDecimals(radar.noiseDbm, 1)} dBm`,
    radar.unambiguousRangeKm === null
      ? undefined
      : `range without folding ${fixedDecimals(radar.unambiguousRangeKm, 0)} km`,
    radar.nyquistVelocityMPerS === null
      ? undefined
      : `velocity without folding ±${fixedDecimals(radar.nyquistVelocityMPerS, 1)} m/s`,
    radar.sensitivity.at1KmDbz === null
      ? undefined
      : `weakest echo at 1 km ${fixedDecimals(radar.sensitivity.at1KmDbz, 1)} dBZ (${radar.sensitivity.basis})`,
    radar.groundHitKm === null
      ? undefined
      : `the beam's centre meets the ground at ${fixedDecimals(radar.groundHitKm, 1)} km`,
  ].filter((fact) => fact !== undefined);
  const withSea = radar.antennaHeightAslM !== null;
  const withLayer = budget.meltingLayerAslM !== null;
  const table = textTable(
    [
      right("range, km"),
      right(withSea ? "beam above sea, m" : "beam above antenna, m"),
      right("beam width, m"),
      ...(withLayer ? [right("melting, %")] : []),
      right("gas, dB"),
      right("weakest, dBZ"),
      right("lightest, mm/h"),
      right("drop, mm"),
    ],
    radar.ranges.map((row) => [
      decimals(row.rangeKm, 1),
      fixedDecimals(withSea ? row.beamCentreAslM : row.beamCentreAboveAntennaM, 0),
      fixedDecimals(row.beamWidthM, 0),
      ...(withLayer
        ? [row.meltingLayerShare === null ? "–" : fixedDecimals(100 * row.meltingLayerShare, 0)]
        : []),
      fixedDecimals(row.gasLossTwoWayDb, 2),
      withoutMinusZero(fixedDecimals(row.weakestEchoDbz, 1)),
      rateText(row.lightestRainMmPerHour),
      dropSizeText(row.smallestDropMm),
    ]),
  );
  const remarks = radar.remarks.map((remark) => `  - ${remark}`).join("\n");
  return [
    `${terminal.strong(radar.name)} (${radar.origin}): ${facts.join(", ")}`,
    table,
    ...(remarks === "" ? [] : [`Mind:\n${remarks}`]),
  ].join("\n");
}

function rainText(budget: Budget, terminal: Terminal): string {
  const rows = budget.radars.flatMap((radar) =>
    radar.rain.map((row) => [
      radar.name,
      decimals(row.rainRateMmPerHour, 0),
      fixedDecimals(row.attenuationOneWayDbPerKm, 3),
      fixedDecimals(row.spectrumAttenuationOneWayDbPerKm, 3),
      fixedDecimals(row.lossTwoWayDb, 1),
      row.shareOfZLost === null ? "–" : percentText(row.shareOfZLost),
      rateText(row.rateShownMmPerHour),
    ]),
  );
  const table = textTable(
    [
      { head: "radar" },
      right("rain, mm/h"),
      right("one way, dB/km"),
      right("by drops, dB/km"),
      right(`both ways over ${decimals(budget.rainKm, 1)} km, dB`),
      right("share of Z lost"),
      right("shown as, mm/h"),
    ],
    rows,
  );
  return `${terminal.strong(`Behind ${decimals(budget.rainKm, 1)} km of even rain`)} (ITU-R P.838-3; by drops: Marshall-Palmer spheres)\n${table}`;
}

function dropText(budget: Budget, terminal: Terminal): string {
  const table = textTable(
    [
      { head: "radar" },
      right("rain, mm/h"),
      right("half of Z above, mm"),
      right("half of R above, mm"),
      right("Z beyond Rayleigh"),
      right("shown over Z, dB"),
    ],
    budget.radars.flatMap((radar) =>
      radar.rain.map((row) => [
        radar.name,
        decimals(row.rainRateMmPerHour, 0),
        fixedDecimals(row.halfOfZAboveMm, 1),
        fixedDecimals(row.halfOfRainAboveMm, 1),
        row.shareOfZBeyondRayleigh === null ? "–" : percentText(row.shareOfZBeyondRayleigh),
        withoutMinusZero(fixedDecimals(row.shownOverZDb, 1)),
      ]),
    ),
  );
  return `${terminal.strong("Which drops carry it")} (Marshall-Palmer spectrum: a few large drops rule Z, many middling ones the rain)\n${table}`;
}

/** Drops break up long before this size: what is larger is no drop. Common practice. */
const NO_DROP_ABOVE_MM = 10;

function dropSizeText(diameterMm: number | null): string {
  if (diameterMm === null) return "–";
  return diameterMm > NO_DROP_ABOVE_MM ? "none" : diameterMm.toFixed(1);
}

function withoutMinusZero(digits: string): string {
  return digits === "-0.0" ? "0.0" : digits;
}

/** A share that is never called all or nothing where it is not. */
function percentText(share: number): string {
  const percent = 100 * share;
  if (percent > 0 && percent < 0.5) return "< 1 %";
  if (percent < 100 && percent > 99.5) return "> 99 %";
  return `${percent.toFixed(0)} %`;
}

/** Two figures that matter; nothing below a ten-thousandth. */
function rateText(rate: number | null): string {
  if (rate === null) return "–";
  if (rate < 0.0001) return "< 0.0001";
  if (rate >= 10) return rate.toFixed(0);
  return String(Number(rate.toPrecision(2)));
}
