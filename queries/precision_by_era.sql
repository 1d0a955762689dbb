-- SPDX-License-Identifier: Apache-2.0
-- question: How precisely are milestones dated, era by era?
-- parameters:
--   present = NULL: the present, decimal year; the end of the earliest compile year without it
-- columns:
--   epoch: power of ten of the age in years, 0 for all under 10 years
--   milestones: milestones of that age
--   finest: smallest width, years
--   median_width: median width, years
--   coarsest: largest width, years
--   median_relative: median of width over age; empty where all ages are 0
SELECT
    greatest(floor(log10(greatest(age, 1.0))), 0)::INTEGER AS epoch, count(*) AS milestones, min(latest - earliest) AS finest,
    median(latest - earliest) AS median_width, max(latest - earliest) AS coarsest, median((latest - earliest) / nullif(age, 0)) AS median_relative
FROM intervals
GROUP BY epoch
ORDER BY epoch
