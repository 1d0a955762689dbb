-- SPDX-License-Identifier: Apache-2.0
-- question: Which categories are there, and over which time?
-- columns:
--   category: category, empty where none is stated
--   milestones: milestones of that category
--   oldest: best decimal year of the oldest
--   youngest: best decimal year of the youngest
--   mean_support: mean number of independent lists
--   mean_importance: mean importance stated
SELECT category, count(*) AS milestones, min(best) AS oldest, max(best) AS youngest, avg(support) AS mean_support, avg(importance) AS mean_importance
FROM milestones
GROUP BY category
ORDER BY milestones DESC, category NULLS LAST
