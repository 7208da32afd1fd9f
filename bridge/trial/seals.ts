/**
 * Seals: lines of seals.jsonl by which any byte changed after the recording is found, with the range it lies in. Each
 * is the SHA-256 (FIPS 180-4) of the seal before it followed by the bytes of packets.cborseq since then. The first, at
 * offset 0, is the SHA-256 of trial.json. Seals find accidents and careless edits; whoever rewrites all of them along
 * with the data is not found.
 */
import { createHash, type Hash } from "node:crypto";
import { z } from "zod";

export const sealSchema = z.strictObject({
  offset: z.number().int().nonnegative().describe("Bytes of packets.cborseq covered so far."),
  sha256: z.string().regex(/^[0-9a-f]{64}$/),
});
export type Seal = z.infer<typeof sealSchema>;

/** The first seal, of the manifest. */
export function manifestSeal(manifest: Uint8Array): Seal {
  return { offset: 0, sha256: createHash("sha256").update(manifest).digest("hex") };
}

export class SealChain {
  /** Bytes taken in since the last seal. */
  unsealedBytes = 0;
  #offset: number;
  #hash: Hash;

  /** Goes on from `start`, whose own value is taken as given. */
  constructor(start: Seal) {
    this.#offset = start.offset;
    this.#hash = chained(start.sha256);
  }

  /** Takes in the bytes that follow. */
  update(bytes: Uint8Array): void {
    this.#hash.update(bytes);
    this.#offset += bytes.length;
    this.unsealedBytes += bytes.length;
  }

  /** The seal of all bytes so far; the next one starts here. */
  seal(): Seal {
    const sha256 = this.#hash.digest("hex");
    this.#hash = chained(sha256);
    this.unsealedBytes = 0;
    return { offset: this.#offset, sha256 };
  }
}

function chained(previous: string): Hash {
  return createHash("sha256").update(Buffer.from(previous, "hex"));
}
