-- SPDX-License-Identifier: Apache-2.0
-- question: Which decisions no longer stand on what was decided?
-- parameters:
--   status = NULL: one of holds, date changed, adrift, withdrawn; without it all but holds and withdrawn
-- columns:
--   decision: id of the decision
--   source_a: name of the first list
--   title_a: title of the first entry
--   source_b: name of the second list
--   title_b: title of the second entry
--   verdict: same or different
--   status: holds, date changed, adrift or withdrawn
--   who: who decided
--   decided_at: when, UTC
--   why: why
SELECT decision, source_a, title_a, source_b, title_b, verdict, status, who, decided_at, why
FROM decisions
WHERE CASE WHEN getvariable('status') IS NULL THEN status IN ('date changed', 'adrift') ELSE status = getvariable('status')::VARCHAR END
ORDER BY decision
