import type { RadarSite } from "@rainreckon/core";
import type { ScanOptions } from "@rainreckon/formats";

/** Where a radar stands, for readers of files that do not say it; where they do, the file's word holds. */
export function placesOf({ site }: { readonly site: RadarSite }): ScanOptions {
  return { places: new Map([[site.id, site]]) };
}
