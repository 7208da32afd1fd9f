/** The outline that stands for a body in pictures. */

/** Width of the body at a station as a share of its greatest width. */
export function taper(kind: "animal" | "dummy" | "foil", station: number): number {
  if (kind === "foil") return rounded(station / 0.05) * (1 - 0.55 * station);
  const behind = Math.max(0, (station - 0.3) / 0.7);
  return rounded(station / 0.3) * (1 - 0.87 * behind ** 0.8);
}

/** A quarter of an ellipse: 0 at the tip, 1 from one on. */
function rounded(share: number): number {
  return Math.sqrt(1 - Math.max(0, 1 - share) ** 2);
}
