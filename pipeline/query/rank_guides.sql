-- Guides for one request, best first; place_in_die = 1 is the guide that stands for its die.
-- Order: dies that can be shipped before those that can't, then the request's order_by, then the id.
WITH keyed AS (
  SELECT
    ranked_guides.*,
    CASE WHEN {order_by} = 'probability' THEN ranked_guides.probability ELSE ordering.mean END AS order_value
  FROM ranked_guides
  LEFT JOIN figures AS ordering
    ON ordering.request = ranked_guides.request
    AND ordering.guide_id = ranked_guides.guide_id
    AND ordering.figure = {order_by}
  WHERE ranked_guides.request = {request}
), placed AS (
  SELECT
    *,
    row_number() OVER (PARTITION BY die_id ORDER BY order_value {direction} NULLS LAST, lot, guide_order) AS place_in_die
  FROM keyed
)
SELECT
  lot, wafer, die_id, guide_id, decision, probability, limited_by, matched, unavailable, qualifying_guides, guides_of_die,
  other_temperatures, window_signal, window_idler, exchange_delay_ps, remarks
FROM placed
WHERE {all_guides} OR place_in_die = 1
ORDER BY available DESC, order_value {direction} NULLS LAST, lot, guide_order
