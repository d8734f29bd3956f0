import { reflectivityDbz } from "@rainreckon/core";
import { writeText } from "@rainreckon/formats";
import { type BudgetChart, budgetPage, svgBudget } from "@rainreckon/report";
import type { KnownRadar } from "./known-radar.ts";
import { RAIN_RATES_MM_PER_HOUR } from "./rain-rows.ts";
import { type BudgetSettings, reckonBudget } from "./reckon.ts";
import type { Budget } from "./schema.ts";

/** Points along the range axis of the chart. */
const POINTS = 125;
const RATE_TICKS_MM_PER_HOUR = [0.001, 0.003, 0.01, 0.03, 0.1, 0.3, 1, 3, 10];

/** Writes the chart of a budget: SVG or HTML by the ending of the file, out to the table's last range. */
export async function writeBudgetChart(
  file: string,
  radars: readonly KnownRadar[],
  settings: BudgetSettings,
  budget: Budget,
): Promise<void> {
  const farKm = Math.max(...settings.rangesKm);
  const rangesKm = Array.from({ length: POINTS }, (_, k) => ((k + 1) * farKm) / POINTS);
  const chart = chartOf(reckonBudget(radars, { ...settings, rangesKm }), settings, budget);
  const text = /\.html$/i.test(file) ? budgetPage(chart) : `${svgBudget("budget", chart).text}\n`;
  await writeText(file, text);
}

function chartOf(dense: Budget, settings: BudgetSettings, budget: Budget): BudgetChart {
  const { a, b } = budget.relation;
  const aboveSea = dense.radars.every(({ antennaHeightAslM }) => antennaHeightAslM !== null);
  const gap = (value: number | null) => value ?? Number.NaN;
  return {
    title: `What ${dense.radars.length === 1 ? "this radar" : "these radars"} can see`,
    heightsAbove: aboveSea ? "mean sea level" : "the antenna",
    rainKm: budget.rainKm,
    rainRatesMmPerHour: RAIN_RATES_MM_PER_HOUR,
    rateTicks: RATE_TICKS_MM_PER_HOUR.map((mmPerHour) => ({
      mmPerHour,
      dbz: reflectivityDbz(mmPerHour, settings.relation),
    })),
    relation: `Z = ${a} R^${b}`,
    radars: dense.radars.map((radar) => {
      const centre = radar.ranges.map((row) =>
        aboveSea ? gap(row.beamCentreAslM) : row.beamCentreAboveAntennaM,
      );
      const half = radar.ranges.map(({ beamWidthM }) => gap(beamWidthM) / 2);
      const band = radar.band === null ? "" : `${radar.band} band, `;
      const where = radar.frequencyGHz === null ? "" : `${band}${radar.frequencyGHz.toFixed(2)} GHz, `;
      return {
        name: radar.name,
        label: `${radar.name}: ${where}elevation ${radar.elevationDeg.toFixed(1)}°`,
        rangeKm: radar.ranges.map(({ rangeKm }) => rangeKm),
        weakestEchoDbz: radar.ranges.map(({ weakestEchoDbz }) => gap(weakestEchoDbz)),
        beamLowM: centre.map((height, k) => height - (half[k] as number)),
        beamCentreM: centre,
        beamHighM: centre.map((height, k) => height + (half[k] as number)),
        rainLossDb: radar.rain.map(({ lossTwoWayDb }) => gap(lossTwoWayDb)),
      };
    }),
  };
}
