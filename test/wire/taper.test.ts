import { expect, test } from "vitest";
import { taper } from "../../bridge/wire/taper.ts";

test.each(["animal", "dummy", "foil"] as const)(
  "the %s begins in a tip, is nowhere wider than its width, and thins to the tail",
  (kind) => {
    const widths = Array.from({ length: 101 }, (_, i) => taper(kind, i / 100));
    expect(widths[0]).toBe(0);
    expect(Math.max(...widths)).toBeLessThanOrEqual(1);
    expect(Math.max(...widths)).toBeGreaterThan(0.95);
    const widest = widths.indexOf(Math.max(...widths));
    for (let i = widest + 1; i <= 100; i++) expect(widths[i]!).toBeLessThan(widths[i - 1]!);
    expect(widths[100]!).toBeGreaterThan(0.1);
  },
);
