import { SCREENS } from "@rainreckon/core";
import {
  type FrameSeries,
  FrameStack,
  type GeographicLattice,
  type MapLayer,
  type ReportInput,
} from "@rainreckon/report";
import { adjustedIntervals } from "./adjust.ts";
import type { AssembledRun } from "./assemble.ts";
import { COMPANIONS, tollName } from "./companions.ts";
import { screenedDepthMm } from "./echo-account.ts";
import type { FigureSources } from "./figures.ts";
import type { PreparedRun } from "./prepare.ts";
import { standardErrorPlane, type Uncertainty } from "./uncertainty.ts";
import type { UnitStore } from "./unit-store.ts";

/** What the map is made from. */
type MapSources = FigureSources & { readonly store: UnitStore; readonly uncertainty: Uncertainty };

/** All that the report's map shows. */
export function reportMap(
  sources: MapSources,
): Pick<ReportInput, "grid" | "layers" | "shownLayerId" | "frames" | "lattice"> {
  const { run, adjustedTotalMm } = sources;
  return {
    grid: run.grid,
    layers: layersOf(sources),
    shownLayerId: adjustedTotalMm === undefined ? "radar-total" : "adjusted-total",
    frames: framesOf(sources),
    lattice: latticeOf(run),
  };
}

function layersOf({ run, total, adjustedTotalMm, uncertainty }: MapSources): MapLayer[] {
  const { planes } = total;
  const layers: MapLayer[] = [];
  if (adjustedTotalMm !== undefined) {
    layers.push({
      quantity: "depthMm",
      id: "adjusted-total",
      label: "Adjusted total",
      what: "Depth from radar adjusted to the gauges over the observed part of the window, mm.",
      values: adjustedTotalMm,
    });
  }
  layers.push(
    {
      quantity: "depthMm",
      id: "radar-total",
      label: "Radar total",
      what: "Depth from radar alone over the observed part of the window, mm.",
      values: planes.totalMm,
    },
    {
      quantity: "fraction",
      id: "observed",
      label: "Observed",
      what: "Share of the window that at least one radar observed.",
      values: planes.observedFraction,
    },
    {
      quantity: "heightM",
      id: "beam-height",
      label: "Beam height",
      what: "Height of the beam centre above mean sea level, averaged over the observed time, m.",
      values: planes.beamHeightAslM,
    },
    {
      quantity: "radarIndex",
      id: "who-spoke",
      label: "Who spoke",
      what: "The radar that carries most of the weight in each cell.",
      values: loudestByCell(total),
    },
  );
  if (uncertainty.known) {
    layers.push({
      quantity: "depthMm",
      scale: "error",
      id: "standard-error",
      label: "Standard error",
      what: `Standard error of the ${adjustedTotalMm === undefined ? "radar" : "adjusted"} total of each single cell, mm. Errors of neighbours are alike: a mean over an area is not much surer than its cells.`,
      values: standardErrorPlane(uncertainty),
    });
  }
  const screened = screenedDepthMm(total);
  if (screened.some((mm) => mm > 0)) {
    layers.push({
      quantity: "depthMm",
      id: "screened",
      label: "Screened out",
      what: "Depth that echo taken out as no rain would have made, mm; no part of the total.",
      values: screened,
    });
  }
  layers.push(
    {
      quantity: "share",
      group: "Time",
      id: "bridged",
      label: "Bridged",
      what: "Share of the window between scans more than 1.5 median rounds apart, bridged all the same.",
      values: planes.bridgedFraction,
    },
    {
      quantity: "share",
      group: "Time",
      id: "edge",
      label: "At the edges",
      what: "Share of the window before the first or after the last scan, for which that scan speaks.",
      values: planes.edgeFraction,
    },
    {
      quantity: "share",
      group: "Rain",
      id: "cap-share",
      label: "At the hail cap",
      what: "Share of the depth that came from gates at the hail cap.",
      values: planes.cappedFraction,
    },
    {
      quantity: "depthMm",
      scale: "own",
      group: "Rain",
      id: "unseen",
      label: "Too weak to be seen",
      what: "The most that rain just below detection could have added over the time without echo, mm; no estimate.",
      values: total.unseenMm,
    },
    ...companionLayers(total),
  );
  return layers.filter(({ group, values }) => group === undefined || says(values, run));
}

/** A plane that is 0 or unknown everywhere says nothing that its absence does not. */
function says(values: Float32Array, { grid }: PreparedRun): boolean {
  if (values.length !== grid.nx * grid.ny) throw new RangeError("a layer does not fill the grid");
  return values.some((value) => !Number.isNaN(value) && value !== 0);
}

/** Index of the radar or source that carries most of the weight; NaN where none does. */
function loudestByCell({ planes }: AssembledRun): Float32Array {
  const loudest = new Float32Array(planes.totalMm.length).fill(Number.NaN);
  for (let cell = 0; cell < loudest.length; cell++) {
    let most = 0;
    for (let r = 0; r < planes.radarShare.length; r++) {
      if (planes.radarShare[r][cell] > most) {
        most = planes.radarShare[r][cell];
        loudest[cell] = r;
      }
    }
  }
  return loudest;
}

/** Short words for what travels with the rain; a screen's toll is called as the screen. */
const COMPANION_LABELS: Readonly<Record<string, string>> = {
  blockage_correction: "For terrain in the beam",
  attenuation_correction: "For attenuation by rain",
  gas_correction: "For attenuation by air",
  profile_correction: "To the ground",
  two_way_loss: "Two-way loss",
  blocked_fraction: "Blocked share of the beam",
  filled_fraction: "Filled from neighbours",
  hail_fraction: "Taken for hail",
  melting_fraction: "Mostly melting snow",
  snow_fraction: "Mostly snow",
  convective_fraction: "From showers",
};

function companionLayers({ planes }: AssembledRun): MapLayer[] {
  const screens = new Map(SCREENS.map((screen) => [tollName(screen), screen.replaceAll("-", " ")]));
  return COMPANIONS.map(({ name, longName, units }, c): MapLayer => {
    const screen = screens.get(name);
    const label = screen ?? COMPANION_LABELS[name] ?? name.replaceAll("_", " ");
    const what = `${longName.charAt(0).toUpperCase()}${longName.slice(1)}${units === "1" ? "" : `, ${units}`}.`;
    const common = { id: name, label: label.charAt(0).toUpperCase() + label.slice(1), what };
    const values = planes.companions[c];
    if (units === "mm") {
      return { ...common, quantity: "depthMm", scale: "own", group: "What each screen took", values };
    }
    if (units === "dB") return { ...common, quantity: "decibel", group: "Losses and corrections", values };
    const group = name === "blocked_fraction" ? "Losses and corrections" : "Rain";
    return { ...common, quantity: "share", group, values };
  });
}

/** The depth of every interval, thinned as it is read: they are never all in memory at full size. */
function framesOf({ run, total, comparison, store }: MapSources): FrameSeries[] {
  const { adjustment } = comparison;
  const radar = new FrameStack("radar-total", run.grid, run.intervals.length);
  let k = 0;
  for (const job of run.jobs) {
    for (const { depthMm } of store.load(job).intervals) radar.add(run.intervals[k++], depthMm);
  }
  if (!adjustment.applied) return [radar.finish()];
  const adjusted = new FrameStack("adjusted-total", run.grid, run.intervals.length);
  k = 0;
  for (const depthMm of adjustedIntervals(run, total, adjustment, store)) {
    adjusted.add(run.intervals[k++], depthMm);
  }
  return [adjusted.finish(), radar.finish()];
}

/** Parts across and down: between corners some tens of kilometres apart a straight line is true to tens of metres. */
const LATTICE_PARTS = 12;

/** Longitudes and latitudes of the corners of equal parts of the grid, to a ten thousandth of a degree. */
function latticeOf({ grid, map }: PreparedRun): GeographicLattice {
  const lonDeg: number[] = [];
  const latDeg: number[] = [];
  for (let row = 0; row <= LATTICE_PARTS; row++) {
    for (let column = 0; column <= LATTICE_PARTS; column++) {
      const [lon, lat] = map.inverse(
        grid.westM + (column / LATTICE_PARTS) * grid.nx * grid.cellM,
        grid.northM - (row / LATTICE_PARTS) * grid.ny * grid.cellM,
      );
      lonDeg.push(Math.round(lon * 1e4) / 1e4);
      latDeg.push(Math.round(lat * 1e4) / 1e4);
    }
  }
  return { across: LATTICE_PARTS, down: LATTICE_PARTS, lonDeg, latDeg };
}
