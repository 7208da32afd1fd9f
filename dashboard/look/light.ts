/** Dark room or daylight: as the machine prefers at first, then as chosen, remembered for this browser. */

export type Light = "dark" | "day";

const KEY = "bendwatch light";

export function currentLight(): Light {
  return document.documentElement.dataset.light === "day" ? "day" : "dark";
}

/** Applies the remembered or preferred light. */
export function initialLight(): void {
  const kept = localStorage.getItem(KEY);
  const preferred = matchMedia("(prefers-color-scheme: light)").matches ? "day" : "dark";
  document.documentElement.dataset.light = kept === "dark" || kept === "day" ? kept : preferred;
}

export function switchLight(): void {
  const light: Light = currentLight() === "day" ? "dark" : "day";
  document.documentElement.dataset.light = light;
  localStorage.setItem(KEY, light);
}
