/**
 * What names in CfRadial files mean as ODIM quantities. ODIM's own names stand for themselves; a name in use for
 * the same thing comes next, then the standard name.
 *
 * @see CfRadial 1.4 data file format (2016), section on standard names; ODIM_H5 2.4 (2021), table of quantities.
 *   The names in use are common practice.
 */
const NAMES_IN_USE: Readonly<Record<string, readonly string[]>> = {
  DBZH: ["DBZ", "REF", "ZH", "reflectivity", "reflectivity_horizontal", "equivalent_reflectivity_factor"],
  DBZV: ["ZV", "reflectivity_vertical"],
  TH: ["DBT", "DBTH", "total_power", "uncorrected_reflectivity", "reflectivity_uncorrected"],
  TV: ["DBTV"],
  VRADH: ["VEL", "VR", "VRAD", "velocity", "radial_velocity", "mean_doppler_velocity"],
  WRADH: ["SW", "WIDTH", "WRAD", "spectrum_width", "doppler_spectrum_width"],
  ZDR: ["differential_reflectivity"],
  RHOHV: ["RHO", "cross_correlation_ratio"],
  PHIDP: ["PHI", "differential_phase"],
  PSIDP: ["PSI"],
  KDP: ["specific_differential_phase"],
  SNRH: ["SNR", "SNRHC", "signal_to_noise_ratio"],
  SQIH: ["SQI", "NCP"],
  LDR: ["linear_depolarization_ratio"],
};

const STANDARD_NAMES: Readonly<Record<string, string>> = {
  equivalent_reflectivity_factor: "DBZH",
  equivalent_reflectivity_factor_h: "DBZH",
  equivalent_reflectivity_factor_v: "DBZV",
  radial_velocity_of_scatterers_away_from_instrument: "VRADH",
  radial_velocity_of_scatterers_away_from_instrument_h: "VRADH",
  doppler_spectrum_width: "WRADH",
  doppler_spectrum_width_h: "WRADH",
  log_differential_reflectivity_hv: "ZDR",
  cross_correlation_ratio_hv: "RHOHV",
  differential_phase_hv: "PHIDP",
  radar_total_differential_phase_hv: "PSIDP",
  specific_differential_phase_hv: "KDP",
  signal_to_noise_ratio: "SNRH",
  linear_depolarization_ratio: "LDR",
};

const ODIM_NAMES: ReadonlySet<string> = new Set(Object.keys(NAMES_IN_USE));
const BY_NAME: ReadonlyMap<string, string> = new Map(
  Object.entries(NAMES_IN_USE).flatMap(([odim, names]) => names.map((name) => [name.toLowerCase(), odim])),
);
const IN_DECIBELS: ReadonlySet<string> = new Set(["DBZH", "DBZV", "TH", "TV"]);

/** A variable that may be a moment. */
export interface NamedVariable {
  readonly name: string;
  readonly standardName?: string;
  readonly units?: string;
}

/** What each variable is called as an ODIM quantity; the first of two that claim one name has it. */
export function odimNames(variables: readonly NamedVariable[]): {
  readonly byQuantity: ReadonlyMap<string, string>;
  readonly remarks: readonly string[];
} {
  const byQuantity = new Map<string, string>();
  const named = new Set<string>();
  const remarks: string[] = [];
  for (const claim of [claimOfOwnName, claimOfNameInUse, claimOfStandardName]) {
    for (const variable of variables) {
      const quantity = claim(variable);
      if (quantity === undefined || named.has(variable.name) || byQuantity.has(quantity)) continue;
      if (IN_DECIBELS.has(quantity) && !/^(dbz?e?|)$/i.test((variable.units ?? "").trim())) continue;
      byQuantity.set(quantity, variable.name);
      named.add(variable.name);
      if (quantity !== variable.name) remarks.push(`The variable ${variable.name} is taken as ${quantity}.`);
    }
  }
  for (const { name } of variables) {
    if (!named.has(name) && /^\w{1,64}$/.test(name) && !byQuantity.has(name)) byQuantity.set(name, name);
  }
  return { byQuantity, remarks };
}

function claimOfOwnName({ name }: NamedVariable): string | undefined {
  return ODIM_NAMES.has(name) ? name : undefined;
}

function claimOfNameInUse({ name }: NamedVariable): string | undefined {
  return BY_NAME.get(name.toLowerCase());
}

function claimOfStandardName({ standardName }: NamedVariable): string | undefined {
  return standardName === undefined || !Object.hasOwn(STANDARD_NAMES, standardName)
    ? undefined
    : STANDARD_NAMES[standardName];
}
