import { displayText } from "@rainreckon/formats";
import { noticeLine } from "../ui/left-out.ts";
import { counted, decimals, lengthText, placeText, utcText } from "../ui/numbers.ts";
import type { Terminal } from "../ui/terminal.ts";
import type {
  Findings,
  GaugeFinding,
  GridFinding,
  Guessed,
  RadarFinding,
  TerrainFinding,
} from "./findings.ts";

const MAX_LINES = 20;
const MAX_NAMES = 12;

/** Findings for people: what there is, what is wrong with it, what can be made of it, what to type next. */
export function surveyText(findings: Findings, terminal: Pick<Terminal, "strong">): string {
  const { radars, gauges, stations, catchments, grids, terrain, otherFiles, wrong, possible, next } =
    findings;
  const have: string[] = [
    ...radars.map(radarText),
    ...grids.map(gridText),
    ...gauges.map(gaugeText),
    ...stations.map(({ file, stationCount, crs, withoutReadings, assets }) =>
      block(`${assets ? "Assets" : "Stations"} ${file}`, [
        `${counted(stationCount, "station")}, ${crs.value ?? "coordinates of an unknown system"} (${standing(crs)})`,
        ...(assets || withoutReadings.length === 0 ? [] : [`without readings: ${names(withoutReadings)}`]),
      ]),
    ),
    ...catchments.map(({ file, format, layer, polygonCount, idField, nameField, crs, crsKnown }) =>
      block(`Catchments ${file}`, [
        `${format}${layer === undefined ? "" : `, layer ${layer}`}: ${counted(polygonCount, "area")}, id in ${idField?.value ?? "no field that tells them apart"}, ` +
          `name in ${nameField?.value ?? "no field"}${crsKnown ? systemText(crs) : ", coordinates of an unknown system"}`,
      ]),
    ),
    ...terrain.map(terrainText),
  ];
  if (otherFiles.length > 0) {
    const kinds = otherFiles.map(({ kind, count }) => `${kind} ${count}`);
    have.push(`Not read: ${names(kinds)}`);
  }
  const faults = wrong.map((notice) => noticeLine(notice));
  return [
    terminal.strong("What there is"),
    have.length === 0 ? "nothing that can be read" : have.join("\n\n"),
    "",
    terminal.strong("What is wrong with it"),
    faults.length === 0 ? "nothing that a look at the headers shows" : lines(faults),
    "",
    terminal.strong("What can be made of it"),
    lines(possible.map((sentence) => displayText(sentence, 600))),
    "",
    terminal.strong("Next"),
    `  ${displayText(next, 2000)}`,
  ].join("\n");
}

function lines(texts: readonly string[]): string {
  const shown = texts.slice(0, MAX_LINES).map((text) => `- ${text}`);
  if (texts.length > MAX_LINES) shown.push(`- and ${texts.length - MAX_LINES} more (--json lists all)`);
  return shown.join("\n");
}

function names(all: readonly string[]): string {
  const shown = all.slice(0, MAX_NAMES).join(", ");
  return all.length > MAX_NAMES ? `${shown} and ${all.length - MAX_NAMES} more` : shown;
}

function block(title: string, body: readonly string[]): string {
  return [displayText(title), ...body.map((line) => `  ${displayText(line, 600)}`)].join("\n");
}

function radarText(radar: RadarFinding): string {
  const name = radar.name === undefined ? "" : ` (${radar.name})`;
  const { least, most } = radar.sweepsPerRound;
  const perRound = least === most ? counted(least, "sweep") : `${least} to ${most} sweeps`;
  const median =
    radar.medianRoundMinutes === null
      ? ""
      : `, median round ${lengthText(radar.medianRoundMinutes * 60_000)}`;
  const gaps = radar.gaps.length === 0 ? "no gaps" : counted(radar.gaps.length, "gap");
  const { sameFile, otherFile } = radar.resent;
  const band =
    radar.wavelengthCm === undefined
      ? "wavelength not given"
      : `${radar.band ?? "no"} band (${radar.wavelengthCm} cm)`;
  const beam = radar.beamWidthDeg === undefined ? "beam width not given" : `beam ${radar.beamWidthDeg}°`;
  const moments = radar.quantities.map(({ name: moment, sweepCount }) =>
    sweepCount === radar.sweepCount ? moment : `${moment} (${sweepCount} of ${radar.sweepCount} sweeps)`,
  );
  const body = [
    `${placeText(radar.lonDeg, radar.latDeg)}, antenna ${decimals(radar.antennaHeightM, 0)} m above sea level`,
    `${band}, ${beam}, reach ${decimals(radar.maxRangeKm, 0)} km; ${radar.formats.join(", ")} in ${counted(radar.fileCount, "file")}`,
    `${counted(radar.sweepCount, "sweep")} in ${counted(radar.roundCount, "round")} of ${perRound}${median}, ${gaps}`,
    `${utcText(Date.parse(radar.firstStart))} to ${utcText(Date.parse(radar.lastEnd))}`,
    `moments ${moments.join(", ")}; elevations ${radar.elevationsDeg.join(", ")}°`,
  ];
  if (sameFile + otherFile > 0) {
    body.push(
      `sent more than once: ${counted(sameFile, "sweep")} with the same content, ${counted(otherFile, "sweep")} with other content`,
    );
  }
  return block(`Radar ${radar.id}${name}`, body);
}

function terrainText({ file, nx, ny, crs, cellWidth, reason }: TerrainFinding): string {
  const unit = /^EPSG:4326$/.test(crs) ? "°" : " m";
  return block(`Terrain ${file}`, [
    `${nx} by ${ny} cells of ${Number(cellWidth.toPrecision(3))}${unit} in ${crs}; guessed: ${reason}`,
    "heights of the ground: what stands in the beams can be told from it",
  ]);
}

const QUANTITY_WORDS: Readonly<Record<GridFinding["quantity"], string>> = {
  rainRateMmPerHour: "rain rate (mm/h)",
  depthMm: "depth (mm)",
  reflectivityDbz: "reflectivity (dBZ)",
};

function gridText(grid: GridFinding): string {
  const step = grid.stepMinutes === null ? "" : ` every ${lengthText(grid.stepMinutes * 60_000)}`;
  const [from, to] = [utcText(Date.parse(grid.firstStart)), utcText(Date.parse(grid.lastEnd))];
  return block(`Grid ${grid.file}`, [
    `${QUANTITY_WORDS[grid.quantity]}, ${counted(grid.layerCount, "layer")}${step}; ${grid.format}`,
    `${grid.nx} by ${grid.ny} ${grid.place}`,
    from === to ? from : `${from} to ${to}`,
    ...grid.remarks,
  ]);
}

function gaugeText(gauge: GaugeFinding): string {
  const { kind, unit, network, layout, zone } = gauge;
  const count = `${counted(gauge.gaugeIds.length, "gauge")}${gauge.allGaugeIdsSeen ? "" : " or more"}`;
  const step =
    gauge.stepMinutes === undefined
      ? "no fixed step"
      : `step ${lengthText(gauge.stepMinutes.value * 60_000)}`;
  const clock = zone.value === null ? " if that is its clock: the stamps name no zone" : "";
  const span =
    gauge.firstStamp === null || gauge.lastStamp === null
      ? "no time that can be read"
      : `${utcText(Date.parse(gauge.firstStamp))} to ${utcText(Date.parse(gauge.lastStamp))}${clock}`;
  const form = layout.value === "waterml2" ? "WaterML 2.0" : `${layout.value} table`;
  const body = [
    `${count}, ${form}, ${step}; network ${network.value} (${standing(network)})`,
    `${kind.value} (${standing(kind)}) in ${unit.value} (${standing(unit)})`,
    span,
    gauge.stationsFile === undefined
      ? "stations: no table names these gauges"
      : `stations: ${gauge.stationsFile}`,
  ];
  const oddities = writtenText(gauge);
  if (oddities.length > 0) body.push(oddities.join("; "));
  if (gauge.stationsFile !== undefined && gauge.withoutStation.length > 0) {
    body.push(`without station: ${names(gauge.withoutStation)}`);
  }
  return block(`Gauges ${gauge.file}`, body);
}

/** How a table is written, where it is not as most are. */
function writtenText(gauge: GaugeFinding): string[] {
  const { encoding, headerLine, decimal, dates, dateOnly, idFrom, fileName, label } = gauge;
  return [
    ...(encoding.value === "utf-8" ? [] : [`${encoding.value} (${standing(encoding)})`]),
    ...(headerLine === undefined ? [] : [`header in line ${headerLine}`]),
    ...(decimal.value === "point" ? [] : [`decimal comma (${standing(decimal)})`]),
    ...(dates.value === "ymd" ? [] : [`dates ${dates.value} (${standing(dates)})`]),
    ...(dateOnly ? ["stamps are days"] : []),
    ...(idFrom.value === "column"
      ? []
      : [
          `one gauge, its id from ${idFrom.value === "file" ? `the file's name ${fileName}` : `"${label}"`} (${standing(idFrom)})`,
        ]),
  ];
}

/** The name of a system: a code, or what well-known text calls it. */
function systemText(crs: string | undefined): string {
  if (crs === undefined) return "";
  const name = /^[A-Z_]+\s*[[(]\s*"([^"]*)"/i.exec(crs)?.[1];
  return `, ${name ?? crs}`;
}

function standing(guess: Guessed<unknown>): string {
  return `${guess.standing}: ${guess.reason}`;
}
