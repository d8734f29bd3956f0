import { arcDistanceM, effectiveRadiusM } from "@rainreckon/core";
import {
  type CheckValue,
  GEODESIC_ENTRIES,
  inputNumber,
  runReferenceSuite,
} from "@rainreckon/test-data/published";
import { geodesicDirect, geodesicInverse } from "./geodesic.ts";

function endOf(entry: CheckValue): { lonDeg: number; latDeg: number } {
  return geodesicDirect(siteOf(entry), inputNumber(entry, "azimuth_deg"), distanceOf(entry));
}

function siteOf(entry: CheckValue): { lonDeg: number; latDeg: number } {
  return { lonDeg: inputNumber(entry, "site_lon_deg"), latDeg: inputNumber(entry, "site_lat_deg") };
}

/** Along the ground: as given, or below a slant range as the lookup works it out. */
function distanceOf(entry: CheckValue): number {
  if ("surface_distance_m" in entry.inputs) return inputNumber(entry, "surface_distance_m");
  const radiusM = effectiveRadiusM(inputNumber(entry, "ke"), 1000 * inputNumber(entry, "earth_radius_km"));
  return arcDistanceM(
    1000 * inputNumber(entry, "slant_range_km"),
    inputNumber(entry, "elevation_deg"),
    radiusM,
  );
}

/** The same direct problem on a sphere of 6371 km: what the ellipsoid is for. */
function sphericalErrorM(entry: CheckValue): number {
  const { lonDeg, latDeg } = siteOf(entry);
  const rad = Math.PI / 180;
  const angle = distanceOf(entry) / 6_371_000;
  const azimuth = inputNumber(entry, "azimuth_deg") * rad;
  const sinLat =
    Math.sin(latDeg * rad) * Math.cos(angle) + Math.cos(latDeg * rad) * Math.sin(angle) * Math.cos(azimuth);
  const dLon = Math.atan2(
    Math.sin(azimuth) * Math.sin(angle) * Math.cos(latDeg * rad),
    Math.cos(angle) - Math.sin(latDeg * rad) * sinLat,
  );
  const onSphere = { lonDeg: lonDeg + dLon / rad, latDeg: Math.asin(sinLat) / rad };
  return geodesicInverse(onSphere, endOf(entry)).distanceM;
}

runReferenceSuite({
  topics: ["g-beam-geometry"],
  only: GEODESIC_ENTRIES,
  adapters: [
    [/-spherical-error$/, sphericalErrorM],
    [/-lon$/, (entry) => endOf(entry).lonDeg],
    [/-lat$/, (entry) => endOf(entry).latDeg],
  ],
});
