/**
 * Normal gravity of the Geodetic Reference System 1980 (H. Moritz, J. Geodesy 74 (2000) 128): Somigliana's closed formula on
 * the ellipsoid, and the second-order expansion in height. The real gravity differs by less than 0.001 m/s² nearly anywhere.
 */
import { RAD_PER_DEG } from "./units.ts";

/** Normal gravity at the equator, m/s², and the formula's constant. */
const EQUATOR = 9.7803267715;
const K = 0.001931851353;
const E_SQUARED = 0.0066943800229;
const SEMI_MAJOR_M = 6378137;
const FLATTENING = 1 / 298.257222101;
/** Centrifugal over gravitational force at the equator. */
const M = 0.00344978600308;

/** m/s². @param heightM above the ellipsoid, for which above the sea is near enough (30 m are 0.0001 m/s²) */
export function normalGravity(latitudeDeg: number, heightM = 0): number {
  const sine2 = Math.sin(latitudeDeg * RAD_PER_DEG) ** 2;
  const onEllipsoid = (EQUATOR * (1 + K * sine2)) / Math.sqrt(1 - E_SQUARED * sine2);
  const h = heightM / SEMI_MAJOR_M;
  return onEllipsoid * (1 - 2 * (1 + FLATTENING + M - 2 * FLATTENING * sine2) * h + 3 * h * h);
}
