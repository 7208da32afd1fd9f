/** The three severities as shapes: ring, diamond, square. On the canvas and in the page alike. */
import type { Graphics } from "pixi.js";
import type { Severity } from "../../bridge/wire/flag.ts";

/** Draws a glyph about 9 pixels high, centred. */
export function drawGlyph(into: Graphics, severity: Severity, x: number, y: number, colour: number): void {
  if (severity === "notice") into.circle(x, y, 3.5).stroke({ width: 2, color: colour });
  else if (severity === "caution") into.poly([x, y - 5.5, x + 5.5, y, x, y + 5.5, x - 5.5, y]).fill(colour);
  else into.rect(x - 4, y - 4, 8, 8).fill(colour);
}

const SHAPES: Readonly<Record<Severity, string>> = {
  notice: '<circle cx="6" cy="6" r="4" fill="none" stroke="currentColor" stroke-width="2"/>',
  caution: '<path d="M6 0 12 6 6 12 0 6z" fill="currentColor"/>',
  alarm: '<path d="M1 1h10v10H1z" fill="currentColor"/>',
};

/** Makes `host` show a severity's glyph and colour; null shows nothing. */
export function setGlyph(host: HTMLElement, severity: Severity | null): void {
  if (setSeverity(host, severity)) {
    host.innerHTML =
      severity === null
        ? ""
        : `<svg viewBox="0 0 12 12" width="12" height="12" aria-hidden="true">${SHAPES[severity]}</svg>`;
  }
}

/** Marks an element with a severity, for the style sheet. @returns whether it had another */
export function setSeverity(host: HTMLElement, severity: Severity | null): boolean {
  if ((host.dataset.severity ?? null) === severity) return false;
  if (severity === null) delete host.dataset.severity;
  else host.dataset.severity = severity;
  return true;
}
