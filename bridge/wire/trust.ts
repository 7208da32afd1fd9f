/** How far a sensor's orientation can be believed, in words; the trust byte of a frame counts into this list. */
export const TRUST_WORDS = [
  "good",
  "settling",
  "bridged",
  "clipped",
  "heading unaided",
  "lost",
  "fused on board",
] as const;
