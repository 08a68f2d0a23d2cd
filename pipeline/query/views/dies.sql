-- One row per die: where it sits, how many guides it has, what coats its facets, and why it can't be delivered.
SELECT
  guides.lot,
  guides.wafer,
  guides.die_id,
  any_value(guides.x_mm) AS x_mm,
  any_value(guides.y_mm) AS y_mm,
  count(*) AS guides,
  max(coating_in.coating_run) AS coating_in,
  max(coating_out.coating_run) AS coating_out,
  max(unavailable.reason) AS unavailable
FROM ledger.guides AS guides
LEFT JOIN coatings AS coating_in
  ON coating_in.lot = guides.lot AND coating_in.die_id = guides.die_id AND coating_in.facet = 'in' AND coating_in.counts
LEFT JOIN coatings AS coating_out
  ON coating_out.lot = guides.lot AND coating_out.die_id = guides.die_id AND coating_out.facet = 'out' AND coating_out.counts
LEFT JOIN (SELECT lot, die_id, max(reason) AS reason FROM ledger.unavailable GROUP BY lot, die_id) AS unavailable
  ON unavailable.lot = guides.lot AND unavailable.die_id = guides.die_id
GROUP BY guides.lot, guides.wafer, guides.die_id
