import fc from 'fast-check';

/**
 * How properties are tried: the same cases in every run, so that a failure is everybody's, and
 * many more of them in the long run. A failure prints its seed, its path and the shrunken case.
 */
const isLong = process.env['HEDDLE_TEST_LONG'] === '1';

fc.configureGlobal({
  seed: 20_260,
  numRuns: isLong ? 10_000 : 300,
  verbose: fc.VerbosityLevel.Verbose,
});
