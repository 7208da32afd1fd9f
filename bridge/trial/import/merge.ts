/** Tables joined by time: rows of different tables that lie close together are one sweep. */
import type { TableRow } from "./table.ts";

/** One sweep's rows; borrowed: reused for the next. */
export interface MergedRow {
  /** Time of the earliest of its rows. */
  timeUs: number;
  /** One per table, in the order given; null where that table has no row here. */
  readonly rows: (TableRow | null)[];
}

/**
 * Joins tables whose own times increase. A sweep begins at the earliest row not used yet and takes from every other table
 * its next row, if that is at most `toleranceUs` later; so times increase and no row is used twice or left out.
 */
export async function* mergeTables(
  tables: readonly AsyncGenerator<TableRow>[],
  toleranceUs: number,
): AsyncGenerator<MergedRow> {
  const next = await Promise.all(tables.map(nextRow));
  const merged: MergedRow = { timeUs: 0, rows: tables.map(() => null) };
  for (;;) {
    const timeUs = Math.min(...next.map((row) => row?.timeUs ?? Number.POSITIVE_INFINITY));
    if (timeUs === Number.POSITIVE_INFINITY) return;
    merged.timeUs = timeUs;
    next.forEach((row, i) => {
      merged.rows[i] = row !== null && row.timeUs - timeUs <= toleranceUs ? row : null;
    });
    yield merged;
    for (let i = 0; i < tables.length; i++) {
      if (merged.rows[i] !== null) next[i] = await nextRow(tables[i]!);
    }
  }
}

async function nextRow(table: AsyncGenerator<TableRow>): Promise<TableRow | null> {
  const result = await table.next();
  return result.done ? null : result.value;
}
