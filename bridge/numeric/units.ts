/** Conversions between SI, used inside, and the units of config, display and export. */
export const RAD_PER_DEG = Math.PI / 180;
export const DEG_PER_RAD = 180 / Math.PI;
/** Standard gravity, m/s² (3rd CGPM 1901): converts g in data sheets and tables; not local gravity. */
export const STANDARD_GRAVITY = 9.80665;
/** 1 gauss = 100 µT. */
export const MICROTESLA_PER_GAUSS = 100;
