/** Words and numbers as the page writes them. */
import type { Flag } from "../../bridge/wire/flag.ts";
import type { WelcomeMessage } from "../../bridge/wire/messages.ts";

/** Sets text only when it differs, so that nothing is laid out anew for nothing. */
export function setText(element: Element, text: string): void {
  if (element.textContent !== text) element.textContent = text;
}

export function millimetres(m: number): string {
  const mm = m * 1000;
  return `${mm >= 100 ? mm.toFixed(0) : mm.toFixed(1)} mm`;
}

/** Keeps a number and its unit on one line. */
export function unbroken(text: string): string {
  return text.replace(/(\d) (%|mm|s|min|h|Hz)(?![a-z])/g, "$1\u00a0$2");
}

/** A share as percent. */
export function percent(share: number, digits = 0): string {
  return `${(share * 100).toFixed(digits)} %`;
}

/** A length of time in the fewest words that tell it: "0.3 s", "12 s", "4 min", "2 h". */
export function duration(s: number): string {
  if (s < 1) return `${Math.max(0, s).toFixed(1)} s`;
  if (s < 90) return `${Math.floor(s)} s`;
  if (s < 5400) return `${Math.floor(s / 60)} min`;
  return `${Math.floor(s / 3600)} h`;
}

/** Elapsed time as on a clock: 04:17, 1:02:09. */
export function clock(seconds: number): string {
  const s = Math.max(0, seconds);
  const two = (n: number) => String(Math.floor(n)).padStart(2, "0");
  const hours = Math.floor(s / 3600);
  const rest = `${two((s % 3600) / 60)}:${two(s % 60)}`;
  return hours > 0 ? `${hours}:${rest}` : rest;
}

export function count(n: number, one: string, many: string): string {
  return `${n} ${n === 1 ? one : many}`;
}

/** "S6 low headroom"; "Link silent" for the whole rig. */
export function flagTitle(flag: Flag, welcome: WelcomeMessage | null): string {
  if (flag.sensor < 0) return flag.kind.charAt(0).toUpperCase() + flag.kind.slice(1);
  return `${welcome?.sensors[flag.sensor]?.name ?? `Sensor ${flag.sensor + 1}`} ${flag.kind}`;
}
