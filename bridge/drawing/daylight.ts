/** The daylight tokens of the dashboard's style sheet, by their names there, for pictures on screen and paper. */
export const DAYLIGHT = {
  ground: "#f6f4ee",
  ink: "#1b2426",
  soft: "#5c6b6d",
  hairline: "#d5d2c6",
  faint: "#ece9df",
  caution: "#976500",
  alarm: "#b42318",
  "body-1": "#8a6a12",
  "body-2": "#4c7a22",
  "body-3": "#11776e",
  "body-4": "#3e57b5",
  "body-5": "#8a3f92",
} as const;

/** Type of all pictures. */
export const TYPE = `font: 11px system-ui, "Segoe UI", Roboto, "Noto Sans", "DejaVu Sans", sans-serif; font-variant-numeric: tabular-nums`;
