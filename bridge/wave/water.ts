/**
 * Kinematic viscosity of water at the pressure of the atmosphere.
 *
 * Viscosity: M. H. Sharqawy, J. H. Lienhard V and S. M. Zubair, Desalination and Water Treatment 16 (2010) 354-380,
 * equations 22 and 23 (after Isdale et al. 1972), 0 to 180 °C and 0 to 150 g/kg, to 1.5 %; fresh water is theirs without
 * salt, to 0.05 %. Density: the UNESCO equation of state of sea water, EOS-80 (F. J. Millero and A. Poisson, Deep-Sea
 * Res. 28A (1981) 625-629), -2 to 40 °C and 0 to 42 g/kg.
 */

/** Dynamic viscosity, Pa s. */
export function viscosityOf(temperatureC: number, salinityGPerKg: number): number {
  const t = temperatureC;
  const s = salinityGPerKg / 1000;
  const fresh = 4.2844e-5 + 1 / (0.157 * (t + 64.993) ** 2 - 91.296);
  const a = 1.541 + 1.998e-2 * t - 9.52e-5 * t * t;
  const b = 7.974 - 7.561e-2 * t + 4.724e-4 * t * t;
  return fresh * (1 + a * s + b * s * s);
}

/** Density, kg/m³. */
export function densityOf(temperatureC: number, salinityGPerKg: number): number {
  const t = temperatureC;
  const s = salinityGPerKg;
  const fresh = polynomial(t, [999.842594, 6.793952e-2, -9.09529e-3, 1.001685e-4, -1.120083e-6, 6.536332e-9]);
  const a = polynomial(t, [8.24493e-1, -4.0899e-3, 7.6438e-5, -8.2467e-7, 5.3875e-9]);
  const b = polynomial(t, [-5.72466e-3, 1.0227e-4, -1.6546e-6]);
  return fresh + a * s + b * s ** 1.5 + 4.8314e-4 * s * s;
}

/** Dynamic viscosity over density, m²/s. */
export function kinematicViscosityOf(temperatureC: number, salinityGPerKg: number): number {
  return viscosityOf(temperatureC, salinityGPerKg) / densityOf(temperatureC, salinityGPerKg);
}

/** @param coefficients of t^0, t^1, ... */
function polynomial(t: number, coefficients: readonly number[]): number {
  return coefficients.reduceRight((sum, coefficient) => sum * t + coefficient, 0);
}
