import { describe, expect, it } from "vitest";
import { FLAG_ADVICE } from "../../bridge/health/advice.ts";
import { ENDED_KEPT, FlagBook } from "../../bridge/health/flag-book.ts";

const SENSORS = [
  { name: "S1", station: 0.06 },
  { name: "S2", station: 0.58 },
  { name: "S3", station: 0.9 },
];

function bookWithLog() {
  const log: string[] = [];
  const note = (what: string) => (flag: { id: number; severity: string; detail: string }) =>
    log.push(`${what} ${flag.id} ${flag.severity} ${flag.detail}`);
  const book = new FlagBook(SENSORS, {
    onRaised: note("raised"),
    onChanged: note("changed"),
    onEnded: note("ended"),
  });
  return { book, log };
}

describe("FlagBook", () => {
  it("counts flags from 1, newest first, and keeps one open for a kind and a sensor", () => {
    const { book, log } = bookWithLog();
    book.raise("stuck axis", 0, "caution", 1, "a");
    book.raise("stuck axis", 1, "caution", 2, "b");
    book.raise("stuck axis", 0, "caution", 3, "c");
    expect(book.open.map(({ id, sensor, startS, detail }) => [id, sensor, startS, detail])).toEqual([
      [2, 1, 2, "b"],
      [1, 0, 1, "c"],
    ]);
    expect(log).toEqual(["raised 1 caution a", "raised 2 caution b", "changed 1 caution c"]);
  });

  it("makes severity worse and never milder, and is silent when nothing changes", () => {
    const { book, log } = bookWithLog();
    book.raise("low headroom", 2, "caution", 1, "a");
    book.update("low headroom", 2, "a", "alarm");
    book.update("low headroom", 2, "a", "notice");
    book.update("low headroom", 2, "a");
    expect(log).toEqual(["raised 1 caution a", "changed 1 alarm a"]);
  });

  it("ends a flag once, never before its start, and opens the next under a new number", () => {
    const { book, log } = bookWithLog();
    book.raise("link silent", -1, "alarm", 5, "a");
    book.clear("link silent", -1, 4);
    book.clear("link silent", -1, 9);
    book.raise("link silent", -1, "alarm", 10, "b");
    expect(book.ended.map((flag) => flag.endS)).toEqual([5]);
    expect(book.find("link silent", -1)!.id).toBe(2);
    expect(log).toEqual(["raised 1 alarm a", "ended 1 alarm a", "raised 2 alarm b"]);
  });

  it("does nothing for flags that are not open", () => {
    const { book, log } = bookWithLog();
    book.update("link silent", -1, "a", "alarm");
    book.clear("link silent", -1, 1);
    expect(log).toEqual([]);
  });

  it("keeps a bounded number of ended flags, newest first", () => {
    const { book } = bookWithLog();
    for (let k = 0; k < ENDED_KEPT + 5; k++) {
      book.raise("hub restarted", -1, "caution", k, "");
      book.clear("hub restarted", -1, k);
    }
    expect(book.ended).toHaveLength(ENDED_KEPT);
    expect(book.ended[0]!.id).toBe(ENDED_KEPT + 5);
  });

  it("ends all that is open when the run is over", () => {
    const { book } = bookWithLog();
    book.raise("stuck axis", 0, "alarm", 1, "");
    book.raise("recording trouble", -1, "alarm", 2, "");
    book.endAll(7);
    expect(book.open).toEqual([]);
    expect(book.ended.map((flag) => flag.endS)).toEqual([7, 7]);
  });
});

describe("advice", () => {
  it("names sensor, place and neighbours", () => {
    const { book } = bookWithLog();
    book.raise("magnetic interference", 1, "caution", 0, "");
    book.raise("sensor read errors", 0, "alarm", 0, "");
    book.raise("stuck axis", 1, "alarm", 0, "");
    expect(book.find("magnetic interference", 1)!.advice).toBe(
      "Something magnetic is near 58 % of the body; move it away or trust S2's heading less.",
    );
    expect(book.find("sensor read errors", 0)!.advice).toContain(
      "its plug at 6 % of the body and the cable from S2",
    );
    expect(book.find("stuck axis", 1)!.advice).toContain("rely on S1 and S3");
  });

  it("is one sentence for every kind, with nothing left to fill in", () => {
    const { book } = bookWithLog();
    for (const key of Object.keys(FLAG_ADVICE) as (keyof typeof FLAG_ADVICE)[]) {
      const sensor = FLAG_ADVICE[key].includes("{") ? 1 : -1;
      book.raise("link silent", sensor, "notice", 0, "", key);
      const { advice } = book.find("link silent", sensor)!;
      expect(advice).toMatch(/^[A-Z][^{}]*\.$/);
      book.clear("link silent", sensor, 0);
    }
  });
});
