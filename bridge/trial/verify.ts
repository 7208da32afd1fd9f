/** Checks a trial: is the manifest readable, does every seal hold, do the records read to the end, how clean was the link. */
import { closeSync, existsSync, fstatSync, openSync, readFileSync, readSync } from "node:fs";
import { join } from "node:path";
import { BendwatchError } from "../errors.ts";
import type { LinkCounters, PacketDecoder } from "../link/packets.ts";
import type { Rig } from "../rig/load.ts";
import { readJsonLines } from "./json-lines.ts";
import { MANIFEST_FILE, type Manifest, PACKETS_FILE, readManifest, SEALS_FILE } from "./manifest.ts";
import { type ReadEnd, TrialReader } from "./reader.ts";
import type { Gap } from "./records.ts";
import { manifestSeal, type Seal, SealChain, sealSchema } from "./seals.ts";

/** Bytes read at a time when hashing. */
const BLOCK_BYTES = 2 ** 20;

/** Bytes of packets.cborseq from `from` up to, not including, `to`. */
export interface ByteRange {
  readonly from: number;
  readonly to: number;
}

export interface VerifyReport {
  readonly folder: string;
  /** null when trial.json cannot be read. */
  readonly manifest: Manifest | null;
  readonly records: number;
  /** Size of packets.cborseq. */
  readonly fileBytes: number;
  /** Bytes of the link in it. */
  readonly linkBytes: number;
  /** From the first record's arrival to the last one's, s. */
  readonly durationS: number;
  readonly seals: number;
  /** Ranges whose seal does not hold, in order: something in them was changed. */
  readonly changedRanges: readonly ByteRange[];
  /** Bytes after the last seal: nothing can be said of them. */
  readonly unsealedBytes: number;
  readonly end: ReadEnd;
  readonly gaps: readonly Gap[];
  /** The packets' own checksums; null without a rig to decode by. */
  readonly packets: Readonly<LinkCounters> | null;
  /** Why the decoder can make nothing of the bytes at the end, if so. */
  readonly complaint: string | null;
  /** Whatever makes the trial less than whole, a sentence each. Noise on the line is none of it. */
  readonly problems: readonly string[];
}

/**
 * Reads a whole trial.
 * @param createDecoder decoder for the rig's packets, whose counters are reported
 * @throws BendwatchError TRIAL_UNREADABLE when there are no packets at all
 */
export function verifyTrial(folder: string, createDecoder: (rig: Rig) => PacketDecoder): VerifyReport {
  const problems: string[] = [];
  const manifest = checkManifest(folder, problems);
  const seals = checkSeals(folder, problems);
  const records = checkRecords(folder, manifest === null ? null : createDecoder(manifest.rig), problems);
  return { folder, manifest, ...seals, ...records, problems };
}

function checkManifest(folder: string, problems: string[]): Manifest | null {
  try {
    return readManifest(folder);
  } catch (error) {
    if (!(error instanceof BendwatchError)) throw error;
    for (const { where, found, expected } of error.details) {
      problems.push(`${where}: found ${found}; expected ${expected}`);
    }
    return null;
  }
}

type SealReport = Pick<VerifyReport, "seals" | "changedRanges" | "unsealedBytes" | "fileBytes">;

function checkSeals(folder: string, problems: string[]): SealReport {
  const { values, badLines } = readJsonLines(join(folder, SEALS_FILE), sealSchema);
  for (const line of badLines) problems.push(`${SEALS_FILE}, line ${line}: not a seal`);
  const file = openPackets(folder);
  try {
    const fileBytes = fstatSync(file).size;
    const first = values[0];
    if (first === undefined || first.offset !== 0) {
      problems.push(`${SEALS_FILE}: no seal of ${MANIFEST_FILE} at its start; changed bytes cannot be found`);
      return { seals: values.length, changedRanges: [], unsealedBytes: fileBytes, fileBytes };
    }
    checkManifestSeal(folder, first, problems);
    const changedRanges: ByteRange[] = [];
    let previous = first;
    for (const seal of values.slice(1)) {
      if (seal.offset > fileBytes || seal.offset < previous.offset) break;
      if (!holds(file, previous, seal)) changedRanges.push({ from: previous.offset, to: seal.offset });
      previous = seal;
    }
    for (const { from, to } of changedRanges) {
      problems.push(`${PACKETS_FILE}: changed since it was recorded, between bytes ${from} and ${to}`);
    }
    const sealedTo = Math.max(...values.map((seal) => seal.offset));
    if (sealedTo > fileBytes)
      problems.push(`${PACKETS_FILE}: ${sealedTo - fileBytes} bytes are gone from its end`);
    return { seals: values.length, changedRanges, unsealedBytes: fileBytes - previous.offset, fileBytes };
  } finally {
    closeSync(file);
  }
}

function openPackets(folder: string): number {
  const path = join(folder, PACKETS_FILE);
  try {
    return openSync(path, "r");
  } catch (cause) {
    throw new BendwatchError(
      "TRIAL_UNREADABLE",
      { where: path, found: (cause as Error).message, expected: "the packets of a trial" },
      { cause },
    );
  }
}

/** A missing manifest is a problem told elsewhere. */
function checkManifestSeal(folder: string, seal: Seal, problems: string[]): void {
  const path = join(folder, MANIFEST_FILE);
  if (!existsSync(path) || manifestSeal(readFileSync(path)).sha256 === seal.sha256) return;
  problems.push(`${MANIFEST_FILE}: changed since it was recorded`);
}

/** Whether the bytes between two seals are those that were sealed. */
function holds(file: number, previous: Seal, seal: Seal): boolean {
  const chain = new SealChain(previous);
  const block = Buffer.allocUnsafe(Math.min(BLOCK_BYTES, seal.offset - previous.offset));
  for (let at = previous.offset; at < seal.offset; ) {
    const read = readSync(file, block, 0, Math.min(block.length, seal.offset - at), at);
    chain.update(block.subarray(0, read));
    at += read;
  }
  return chain.seal().sha256 === seal.sha256;
}

type RecordReport = Pick<
  VerifyReport,
  "records" | "linkBytes" | "durationS" | "end" | "gaps" | "packets" | "complaint"
>;

function checkRecords(folder: string, decoder: PacketDecoder | null, problems: string[]): RecordReport {
  const reader = new TrialReader(folder);
  const gaps: Gap[] = [];
  let records = 0;
  let linkBytes = 0;
  let firstMs = Number.POSITIVE_INFINITY;
  let lastMs = Number.NEGATIVE_INFINITY;
  let ended = false;
  for (let record = reader.next(); record !== null; record = reader.next()) {
    records++;
    firstMs = Math.min(firstMs, record.hostTimeMs);
    lastMs = Math.max(lastMs, record.hostTimeMs);
    ended = record.kind === "end";
    if (record.kind === "gap") gaps.push(record.gap);
    if (record.kind !== "bytes") continue;
    linkBytes += record.chunk.length;
    decoder?.push(record.chunk, record.hostTimeMs);
  }
  reader.close();
  const end = reader.end!;
  if (end.kind === "damaged") {
    problems.push(
      `${PACKETS_FILE}: no record at byte ${end.offset}; ${end.unreadBytes} bytes cannot be read`,
    );
  } else if (end.kind === "truncated") {
    problems.push(
      `${PACKETS_FILE}: the last record is cut off; ${end.unreadBytes} bytes of it from byte ${end.offset}`,
    );
  } else if (!ended) {
    problems.push(`${PACKETS_FILE}: no end record; the recording was cut short`);
  }
  for (const gap of gaps) problems.push(`${gapText(gap)} were not recorded: ${gap.reason}`);
  const durationS = records === 0 ? 0 : (lastMs - firstMs) / 1000;
  return {
    records,
    linkBytes,
    durationS,
    end,
    gaps,
    packets: decoder?.counters ?? null,
    complaint: decoder?.complaint ?? null,
  };
}

function gapText(gap: Gap): string {
  return `${gap.bytes} bytes of the link over ${((gap.toMs - gap.fromMs) / 1000).toFixed(1)} s`;
}

/** A report as text for the terminal. */
export function describeVerify(report: VerifyReport): string {
  const { manifest, packets, problems } = report;
  const lines = [
    `Trial     ${report.folder}`,
    ...(manifest === null
      ? []
      : [
          `Rig       ${manifest.rig.name}, ${manifest.rig.sensors.length} sensors`,
          `Recorded  ${manifest.startedAt}, ${manifest.origin.kind}, by version ${manifest.softwareVersion}`,
        ]),
    `Records   ${report.records}, ${report.linkBytes} bytes of the link over ${report.durationS.toFixed(1)} s`,
    `Seals     ${report.seals}${report.unsealedBytes > 0 ? `; the last ${report.unsealedBytes} bytes are not sealed` : ""}`,
    ...(packets === null ? [] : [`Packets   ${packetText(packets)}`]),
    ...(report.complaint === null ? [] : [`          ${report.complaint}`]),
    "",
    ...(problems.length === 0 ? ["Whole: every byte is as it was recorded."] : ["Not whole:"]),
    ...problems.map((problem) => `  ${problem}`),
  ];
  return lines.join("\n");
}

function packetText(packets: Readonly<LinkCounters>): string {
  const { good, badChecksum, overLong, notUnderstood, discardedBytes } = packets;
  return (
    `${good} good, ${badChecksum} with a wrong checksum, ${overLong} too long, ${notUnderstood} not understood; ` +
    `${discardedBytes} bytes belong to none`
  );
}
