/**
 * Property tests are repeatable: one seed, unless FAST_CHECK_SEED gives another; FAST_CHECK_RUNS runs them longer, as
 * for a night of fuzzing.
 */
import fc from "fast-check";

const { FAST_CHECK_SEED = "20260601", FAST_CHECK_RUNS } = process.env;

fc.configureGlobal({
  seed: Number(FAST_CHECK_SEED),
  ...(FAST_CHECK_RUNS === undefined ? {} : { numRuns: Number(FAST_CHECK_RUNS) }),
});
