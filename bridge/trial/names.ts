/** Names of new trials, from the host's clock: 2026-12-01-07 is the seventh of that day. */
import { existsSync, readdirSync } from "node:fs";

/**
 * The next free name of the day (local time): one past the highest there is, so that a trial moved away does not give
 * its number to another.
 * @param recordingsFolder need not exist yet
 */
export function nextTrialName(recordingsFolder: string, date: Date): string {
  const day = [date.getFullYear(), date.getMonth() + 1, date.getDate()]
    .map((part) => String(part).padStart(2, "0"))
    .join("-");
  const taken = existsSync(recordingsFolder) ? readdirSync(recordingsFolder) : [];
  const numbers = taken.flatMap((name) => {
    const number = name.startsWith(`${day}-`) ? name.slice(day.length + 1) : "";
    return /^\d{2,6}$/.test(number) ? [Number(number)] : [];
  });
  return `${day}-${String(Math.max(0, ...numbers) + 1).padStart(2, "0")}`;
}
