-- SPDX-License-Identifier: Apache-2.0
-- question: Which milestones carry datings that share no year?
-- columns:
--   milestone: id of the milestone
--   title: its title
--   best: best decimal year of the pooled dating
--   entries: entries in it
--   q: Cochran's Q of its datings
--   q_p: chance of a Q as large when all datings mean one date
--   i2: share of the spread that dating errors do not explain, 0 to 1
--   birge: Birge ratio
--   sources: names of the lists
SELECT milestone, title, best, entries, q, q_p, i2, birge, sources
FROM milestones
WHERE disjoint
ORDER BY q DESC NULLS LAST, milestone
