import { statSync } from "node:fs";
import { InputError, LowestEcho, midEpochMs, type Notice, type SweepHeader } from "@rainreckon/core";
import { formatsReady, openScan } from "@rainreckon/formats";
import { counted } from "../ui/numbers.ts";
import type { KnownRadar } from "./known-radar.ts";

/** So many sweeps of a site are read for their weakest echo; more would tell little else. */
const SWEEPS_MEASURED = 24;

interface FoundSweep {
  readonly path: string;
  readonly index: number;
  readonly header: SweepHeader;
}

/**
 * The radars of scan files, one a site, each by its lowest sweep, with the weakest echo measured.
 *
 * @param onNotice - is told of each file that could not be used
 * @throws InputError (no-input) where no file holds a sweep
 */
export async function radarsOfFiles(
  paths: readonly string[],
  onNotice: (notice: Notice) => void,
): Promise<KnownRadar[]> {
  await formatsReady();
  const sites = new Map<string, FoundSweep[]>();
  for (const path of [...new Set(paths)]) {
    try {
      const found = statSync(path, { throwIfNoEntry: false });
      if (found === undefined) throw new InputError("no such file", path, "name scan files that exist");
      if (!found.isFile()) throw new InputError("this is a folder", path, "name the scan files in it");
      const scan = openScan(path);
      try {
        for (const [index, header] of scan.headers.entries()) {
          const ofSite = sites.get(header.site.id) ?? [];
          sites.set(header.site.id, ofSite);
          ofSite.push({ path, index, header });
        }
      } finally {
        scan.close();
      }
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      onNotice({ what: error.what, where: error.where, fix: error.fix });
    }
  }
  if (sites.size === 0) {
    throw new InputError(
      "no scan that can be read",
      paths.join(", "),
      "name scan files of radars: ODIM_H5, CfRadial and others that survey knows",
      {
        kind: "no-input",
      },
    );
  }
  return [...sites.entries()]
    .sort(([one], [other]) => (one < other ? -1 : 1))
    .map(([id, sweeps]) => radarOfSweeps(id, sweeps, onNotice));
}

function radarOfSweeps(
  id: string,
  sweeps: readonly FoundSweep[],
  onNotice: (notice: Notice) => void,
): KnownRadar {
  const sorted = [...sweeps].sort(
    (one, other) =>
      one.header.elevationDeg - other.header.elevationDeg ||
      midEpochMs(one.header) - midEpochMs(other.header),
  );
  const lowest = (sorted[0] as FoundSweep).header;
  // Sites say some things once only, on whichever sweep.
  const said = <T>(of: (header: SweepHeader) => T | undefined): T | undefined => {
    for (const { header } of sorted) if (of(header) !== undefined) return of(header);
    return undefined;
  };
  return {
    name: lowest.site.name ?? id,
    origin: `${id}, ${counted(sweeps.length, "sweep")} in ${counted(new Set(sweeps.map(({ path }) => path)).size, "file")}`,
    wavelengthM: said((header) => header.wavelengthM),
    beamWidthDeg: said((header) => header.beamWidthDeg),
    gateLengthM: lowest.gateLengthM,
    radarConstantDb: said((header) => header.radarConstantDb),
    noiseEquivalentDbz: said((header) => header.noiseEquivalentDbz),
    nyquistVelocityMPerS: said((header) => header.nyquistVelocityMPerS),
    measured: weakestEcho(sorted, onNotice),
    elevationDeg: lowest.elevationDeg,
    antennaHeightM: lowest.site.antennaHeightM,
    remarks: [],
  };
}

/** The weakest echo of a site, from sweeps spread evenly over those there are. */
function weakestEcho(sweeps: readonly FoundSweep[], onNotice: (notice: Notice) => void) {
  const every = Math.max(1, Math.ceil(sweeps.length / SWEEPS_MEASURED));
  const echo = new LowestEcho();
  for (const { path, index, header } of sweeps.filter((_, k) => k % every === 0)) {
    const quantity = ["DBZH", "TH"].find((name) => header.quantities.includes(name));
    if (quantity === undefined) continue;
    try {
      const scan = openScan(path);
      try {
        const moment = scan.readSweep(index, [quantity]).moments.get(quantity);
        if (moment !== undefined) echo.add(header, moment, `${path}, ${header.origin.dataset}`);
      } finally {
        scan.close();
      }
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      onNotice({ what: error.what, where: error.where, fix: error.fix });
    }
  }
  return echo.measure();
}
