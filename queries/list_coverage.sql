-- SPDX-License-Identifier: Apache-2.0
-- question: What does each list cover, and how much of it is its own?
-- columns:
--   source: name of the list
--   compiled: year in which it was compiled
--   entries: entries loaded
--   rejected: rows refused
--   oldest: best decimal year of its oldest entry
--   youngest: best decimal year of its youngest entry
--   milestones: milestones it names
--   alone: of these, named by no independent list beside it
--   share: its milestones over all milestones
SELECT
    s.source, s.compiled, s.rows_loaded AS entries, s.rows_rejected AS rejected, min(e.best) AS oldest, max(e.best) AS youngest,
    s.milestones, s.alone, s.milestones / nullif((SELECT count(*) FROM milestones), 0)::DOUBLE AS share
FROM sources AS s LEFT JOIN entries AS e ON e.source = s.source
GROUP BY ALL
ORDER BY s.source
