-- SPDX-License-Identifier: Apache-2.0
-- question: Which grids and reports were made from this timeline?
-- parameters:
--   rows = 100: rows shown at most
-- columns:
--   run: id of the run
--   run_at: when, UTC
--   command: command line
--   version: version of the program
--   seed: seed of the random numbers
--   draws: number of draws
--   record: hash of the record
SELECT run, run_at, command, version, seed, draws, record
FROM runs
ORDER BY run DESC
LIMIT coalesce(getvariable('rows')::BIGINT, 100)
