-- SPDX-License-Identifier: Apache-2.0
-- question: What do any two lists share?
-- columns:
--   source_a: name of the first list
--   source_b: name of the second list
--   milestones_a: milestones the first names
--   milestones_b: milestones the second names
--   shared: milestones both name
--   jaccard: shared over all that either names
--   chapman: estimate of all there were, had both picked independently and evenly
SELECT source_a, source_b, milestones_a, milestones_b, shared, jaccard, chapman
FROM overlap
ORDER BY source_a, source_b
