/** Reads a PNG as browsers write screenshots: eight bits a channel, RGB or RGBA, not interlaced (W3C PNG, third edition). */
import { inflateSync } from "node:zlib";

export interface Picture {
  readonly width: number;
  readonly height: number;
  /** Bytes a pixel: 3 or 4. */
  readonly channels: number;
  readonly data: Uint8Array;
}

const SIGNATURE_BYTES = 8;
const RGB = 2;
const RGBA = 6;

export function decodePng(file: Buffer): Picture {
  const body: Buffer[] = [];
  let width = 0;
  let height = 0;
  let channels = 0;
  for (let at = SIGNATURE_BYTES; at < file.length; ) {
    const length = file.readUInt32BE(at);
    const type = file.toString("latin1", at + 4, at + 8);
    const data = file.subarray(at + 8, at + 8 + length);
    at += length + 12;
    if (type === "IDAT") body.push(data);
    if (type !== "IHDR") continue;
    width = data.readUInt32BE(0);
    height = data.readUInt32BE(4);
    const colour = data[9];
    if (data[8] !== 8 || (colour !== RGB && colour !== RGBA) || data[12] !== 0) {
      throw new Error("only RGB and RGBA of eight bits, not interlaced, are read");
    }
    channels = colour === RGBA ? 4 : 3;
  }
  return {
    width,
    height,
    channels,
    data: unfilter(inflateSync(Buffer.concat(body)), width * channels, channels),
  };
}

/** Undoes each row's filter: none, sub, up, average, Paeth. */
function unfilter(rows: Buffer, stride: number, channels: number): Uint8Array {
  const count = rows.length / (stride + 1);
  const out = new Uint8Array(count * stride);
  for (let y = 0; y < count; y++) {
    const filter = rows[y * (stride + 1)]!;
    for (let x = 0; x < stride; x++) {
      const at = y * stride + x;
      const left = x >= channels ? out[at - channels]! : 0;
      const up = y > 0 ? out[at - stride]! : 0;
      const corner = x >= channels && y > 0 ? out[at - stride - channels]! : 0;
      const guess = [0, left, up, (left + up) >> 1, paeth(left, up, corner)][filter]!;
      out[at] = rows[y * (stride + 1) + 1 + x]! + guess;
    }
  }
  return out;
}

function paeth(left: number, up: number, corner: number): number {
  const estimate = left + up - corner;
  const toLeft = Math.abs(estimate - left);
  const toUp = Math.abs(estimate - up);
  const toCorner = Math.abs(estimate - corner);
  if (toLeft <= toUp && toLeft <= toCorner) return left;
  return toUp <= toCorner ? up : corner;
}
