/**
 * The Earth's magnetic field at a site, from the World Magnetic Model (NOAA NCEI and British Geological Survey, WMM2025
 * and its predecessors), computed by the `geomagnetism` package.
 *
 * How the package behaves: it takes the newest model whose own dates hold the given one (WMM2025 from 2024-11-13 to
 * 2029-11-13) and carries its coefficients to that date by their yearly change; it throws outside all models; its height
 * is in km above the ellipsoid, for which height above the sea is near enough (60 m are 2 nT).
 */
import geomagnetism from "geomagnetism";
import { BendwatchError } from "../errors.ts";
import { RAD_PER_DEG } from "../numeric/units.ts";
import type { ExpectedField } from "./setup.ts";

export interface Site {
  readonly latitudeDeg: number;
  readonly longitudeDeg: number;
  readonly heightM: number;
}

export interface SiteField extends ExpectedField {
  /** From true north to magnetic north, rad, positive to the east. */
  readonly declinationRad: number;
  readonly northUT: number;
  readonly eastUT: number;
  readonly downUT: number;
}

const UT_PER_NT = 1e-3;

/** The field at `site` on `date`. @throws BendwatchError CONFIG_INVALID when no model holds the date */
export function siteField(site: Site, date: Date): SiteField {
  const point = modelOf(date).point([site.latitudeDeg, site.longitudeDeg, site.heightM / 1000]);
  return {
    normUT: point.f * UT_PER_NT,
    dipRad: point.incl * RAD_PER_DEG,
    declinationRad: point.decl * RAD_PER_DEG,
    northUT: point.x * UT_PER_NT,
    eastUT: point.y * UT_PER_NT,
    downUT: point.z * UT_PER_NT,
  };
}

function modelOf(date: Date): geomagnetism.GeomagnetismModel {
  try {
    // toISOString refuses an invalid date; the package would answer it with a field of NaN.
    return geomagnetism.model(new Date(date.toISOString()));
  } catch (cause) {
    throw new BendwatchError(
      "CONFIG_INVALID",
      {
        where: "site.date, or the trial's own date",
        found: Number.isNaN(date.getTime()) ? "no date" : date.toISOString().slice(0, 10),
        expected: "a date the World Magnetic Model holds for, 2014-12-15 to 2029-11-13; or no site",
      },
      { cause },
    );
  }
}
