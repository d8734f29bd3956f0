import { type Phase, type ZrRelation, zrRelation } from "./zr-relation.ts";

/** How sure the numbers are: seen in a publication while collecting, or recalled and not confirmed there. */
export type Standing = "published table" | "from memory";

/** A relation of the catalogue: when it fits, how far it reaches, and how sure its numbers are. */
export interface PublishedRelation extends ZrRelation {
  /** author-year-A/b; where no author is known to us, the practice that uses it. */
  readonly name: string;
  /** The weather it was made for, in plain words. */
  readonly regime: string;
  /** Rates that it may be used for; `standing` says where these limits come from. */
  readonly validRateMmPerHour: {
    readonly low: number;
    readonly high: number;
    readonly standing: "common practice" | "from memory";
  };
  /** Standing of a and b. */
  readonly standing: Standing;
}

/** The customary limits of rain relations; the papers' own are narrower where they state any. */
const RAIN_RATES = { low: 0.1, high: 150, standing: "common practice" } as const;
/** Melted rates of the spectra that both snow relations rest on. */
const SNOW_RATES = { low: 0.3, high: 2.5, standing: "from memory" } as const;

function published(
  author: string,
  a: number,
  b: number,
  regime: string,
  source: string,
  standing: Standing = "from memory",
  phase: Phase = "rain",
): PublishedRelation {
  // At least one decimal, as b is printed: 2.0.
  const exponent = Number.isInteger(b) ? b.toFixed(1) : String(b);
  return {
    ...zrRelation(a, b, source, phase),
    name: `${author}-${a}/${exponent}`,
    regime,
    validRateMmPerHour: phase === "rain" ? RAIN_RATES : SNOW_RATES,
    standing,
  };
}

/**
 * Published relations between reflectivity and rain rate, by ascending b, then a.
 *
 * Only the first Marshall relation was confirmed while collecting, in a public meteorological glossary;
 * the coefficients of the others, and volume and pages of their sources, are from memory.
 */
export const RELATIONS: readonly PublishedRelation[] = [
  published(
    "rosenfeld-1993",
    250,
    1.2,
    "tropical rain, warm and very moist air",
    "Rosenfeld, Wolff and Atlas (1993), J. Appl. Meteorol. 32, 50-72",
  ),
  published(
    "fujiwara-1965",
    300,
    1.37,
    "rain showers, Florida",
    "Fujiwara (1965), J. Atmos. Sci. 22, 585-591",
  ),
  published(
    "jones-1956",
    486,
    1.37,
    "thunderstorms, Illinois",
    "Jones (1956), Illinois State Water Survey, Research Report 6",
  ),
  published(
    "fulton-1998",
    300,
    1.4,
    "deep convection in summer; default of U.S. operations",
    "Fulton, Breidenbach, Seo, Miller and O'Bannon (1998), Weather Forecast. 13, 377-395",
  ),
  published(
    "german-practice",
    256,
    1.42,
    "all rain; long in operational use in Germany",
    "operational practice in Germany; first publication not known to us",
  ),
  published(
    "fujiwara-1965",
    450,
    1.46,
    "thunderstorms, Florida",
    "Fujiwara (1965), J. Atmos. Sci. 22, 585-591",
  ),
  published(
    "fujiwara-1965",
    205,
    1.48,
    "continuous rain, Florida",
    "Fujiwara (1965), J. Atmos. Sci. 22, 585-591",
  ),
  published("joss-1970", 140, 1.5, "drizzle", "Joss, Schram, Thams and Waldvogel (1970), Zurich"),
  published("joss-1970", 250, 1.5, "widespread rain", "Joss, Schram, Thams and Waldvogel (1970), Zurich"),
  published(
    "joss-1970",
    300,
    1.5,
    "all rain, mid latitudes",
    "Joss and Waldvogel (1970), 14th Radar Meteorology Conference, 237-238",
  ),
  published(
    "joss-1998",
    316,
    1.5,
    "all rain; operations in the Alps",
    "Joss et al. (1998), Operational use of radar for precipitation measurements in Switzerland, Zurich",
  ),
  published("joss-1970", 500, 1.5, "thunderstorms", "Joss, Schram, Thams and Waldvogel (1970), Zurich"),
  published(
    "leinonen-2012",
    223,
    1.53,
    "all rain, Finland",
    "Leinonen, Moisseev, Leskinen and Petersen (2012), J. Appl. Meteorol. Climatol. 51, 392-404",
  ),
  published(
    "marshall-1955",
    200,
    1.6,
    "widespread (stratiform) rain, and general use in mid latitudes",
    "Marshall, Hitschfeld and Gunn (1955), Advances in Geophysics 2, 1-56",
    "published table",
  ),
  published(
    "marshall-1948",
    220,
    1.6,
    "widespread rain; printed beside the drop-size spectrum of the same paper",
    "Marshall and Palmer (1948), J. Meteorol. 5, 165-166",
  ),
  published(
    "blanchard-1953",
    31,
    1.71,
    "orographic rain without melting ice, Hawaii",
    "Blanchard (1953), J. Meteorol. 10, 457-473",
  ),
  published(
    "us-west-practice",
    75,
    2,
    "widespread rain of the cool season, western U.S.",
    "operational practice in the U.S.; first publication not known to us",
  ),
  published(
    "us-east-practice",
    130,
    2,
    "widespread rain of the cool season, eastern U.S.",
    "operational practice in the U.S.; first publication not known to us",
  ),
  published(
    "gunn-1958",
    2000,
    2,
    "dry snow, aggregates; melted rate",
    "Gunn and Marshall (1958), J. Meteorol. 15, 452-461",
    "from memory",
    "snow",
  ),
  published(
    "sekhon-1970",
    1780,
    2.21,
    "dry snow; melted rate",
    "Sekhon and Srivastava (1970), J. Atmos. Sci. 27, 299-307",
    "from memory",
    "snow",
  ),
];
