-- SPDX-License-Identifier: Apache-2.0
-- question: How many pairs were linked, wait for review, or were kept apart?
-- columns:
--   state: linked, implied, review, blocked, same or different
--   pairs: pairs in that state
--   lowest_score: lowest score among them
--   median_score: median score
--   highest_score: highest score
SELECT state, count(*) AS pairs, min(score) AS lowest_score, median(score) AS median_score, max(score) AS highest_score
FROM links
GROUP BY state
ORDER BY state
