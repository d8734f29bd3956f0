import { SCREENS, type Screen } from "@rainreckon/core";
import type { CompanionKind } from "@rainreckon/mosaic";

/** A value that travels with the rain from gate to total, and what people read of it. */
export interface Companion {
  /** Name of its variable in totals.nc. */
  readonly name: string;
  readonly kind: CompanionKind;
  readonly longName: string;
  readonly units: string;
}

const EFFECTS_SHOWN: readonly Companion[] = [
  {
    name: "blockage_correction",
    kind: "depth",
    longName: "decibels added for terrain in the beam, mean by depth",
    units: "dB",
  },
  {
    name: "attenuation_correction",
    kind: "depth",
    longName: "decibels added for attenuation by rain, mean by depth",
    units: "dB",
  },
  {
    name: "gas_correction",
    kind: "depth",
    longName: "decibels added for attenuation by air, mean by depth",
    units: "dB",
  },
  {
    name: "profile_correction",
    kind: "depth",
    longName: "decibels added to bring echo aloft to the ground, mean by depth",
    units: "dB",
  },
  {
    name: "two_way_loss",
    kind: "depth",
    longName: "estimated two-way loss to the cell, rain and air, mean by depth",
    units: "dB",
  },
  {
    name: "blocked_fraction",
    kind: "time",
    longName: "share of the beam that terrain takes, mean by time",
    units: "1",
  },
  {
    name: "filled_fraction",
    kind: "depth",
    longName: "share of the depth from gates that were screened and filled",
    units: "1",
  },
  {
    name: "hail_fraction",
    kind: "depth",
    longName: "share of the depth from gates taken for hail",
    units: "1",
  },
  {
    name: "melting_fraction",
    kind: "depth",
    longName: "share of the depth from gates mostly in melting snow",
    units: "1",
  },
  {
    name: "snow_fraction",
    kind: "depth",
    longName: "share of the depth from gates mostly in snow",
    units: "1",
  },
  {
    name: "convective_fraction",
    kind: "depth",
    longName: "share of the depth from showers",
    units: "1",
  },
];

/** All of them, in the order of every array of companions. */
export const COMPANIONS: readonly Companion[] = [
  ...EFFECTS_SHOWN,
  ...SCREENS.map(
    (screen): Companion => ({
      name: tollName(screen),
      kind: "toll",
      longName: `depth that echo taken out as ${screen.replaceAll("-", " ")} would have made`,
      units: "mm",
    }),
  ),
];

/** Name of the companion that holds what a screen took away. */
export function tollName(screen: Screen): string {
  return `screened_depth_${screen.replaceAll("-", "_")}`;
}

/** Place of a companion in {@link COMPANIONS}. */
export function companionIndex(name: string): number {
  const index = COMPANIONS.findIndex((companion) => companion.name === name);
  if (index === -1) throw new RangeError(`no companion is named ${name}`);
  return index;
}
