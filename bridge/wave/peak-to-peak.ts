/** From lowest to highest of a sum of harmonics. */
import { HARMONICS, TERMS } from "./cycle-fit.ts";

/** Places in a cycle: nine to a period of the third harmonic, where a parabola is within 1 % of its crest. */
const PLACES = 28;

/** TERMS a place: what each term is multiplied by there. */
const basis = new Float64Array(PLACES * TERMS);
for (let place = 0; place < PLACES; place++) {
  const theta = (2 * Math.PI * place) / PLACES;
  for (let h = 1; h <= HARMONICS; h++) {
    basis[place * TERMS + 2 * h - 1] = Math.cos(h * theta);
    basis[place * TERMS + 2 * h] = Math.sin(h * theta);
  }
}
const curve = new Float64Array(PLACES);

/** @param terms as CycleFit leaves them @param series which of them */
export function peakToPeak(terms: Float64Array, series: number): number {
  let highest = 0;
  let lowest = 0;
  for (let place = 0; place < PLACES; place++) {
    let value = 0;
    for (let term = 1; term < TERMS; term++)
      value += basis[place * TERMS + term] * terms[series * TERMS + term];
    curve[place] = value;
    if (value > curve[highest]) highest = place;
    if (value < curve[lowest]) lowest = place;
  }
  return crest(highest) - crest(lowest);
}

/** Height of the parabola through a place and its two neighbours. */
function crest(place: number): number {
  const before = curve[(place + PLACES - 1) % PLACES];
  const middle = curve[place];
  const behind = curve[(place + 1) % PLACES];
  const bend = 2 * middle - before - behind;
  return bend === 0 ? middle : middle + (before - behind) ** 2 / (8 * bend);
}
