-- Every coating entry of every die and facet. A facet coated again keeps its last entry: only that one counts.
SELECT
  *,
  row_number() OVER (PARTITION BY lot, die_id, facet ORDER BY entry DESC) = 1 AS counts
FROM ledger.coatings
