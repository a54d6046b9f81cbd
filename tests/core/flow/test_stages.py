"""Loop shares and drops stage by stage: the order of the stages, and stages that were not solved.

Truth: written out by hand.
"""

from __future__ import annotations

import json

from core.flow.stages import stage_flows


def test_stages_stand_in_the_order_of_the_reverse_flow():
    first, second, third = stage_flows(
        shares_forward=(0.1, 0.2, 0.3),
        shares_reverse=(0.4, 0.5, 0.6),
        drops_forward_pa=(7.0, 8.0),  # forward flow comes to the third stage first
        drops_reverse_pa=(9.0, 10.0),
    )
    assert [each.number for each in (first, second, third)] == [1, 2, 3]
    assert (first.loop_share_forward, third.loop_share_reverse) == (0.1, 0.6)
    assert (first.to_next_reverse_pa, first.to_next_forward_pa) == (9.0, 8.0)
    assert (second.to_next_reverse_pa, second.to_next_forward_pa) == (10.0, 7.0)
    assert (third.to_next_reverse_pa, third.to_next_forward_pa) == (None, None)
    assert json.loads(json.dumps(first.as_dict()))["to_next_forward_pa"] == 8.0


def test_stages_not_solved_stand_before_the_last_drop_of_each_flow():
    stages = stage_flows(
        shares_forward=(0.1,) * 7,
        shares_reverse=(0.2,) * 7,
        drops_forward_pa=(10.0, 20.0, 24.0, 5.0),
        drops_reverse_pa=(1.0, 3.0, 5.0, 6.0),
    )
    assert [each.to_next_reverse_pa for each in stages] == [1.0, 3.0, 5.0, 4.0, 4.0, 6.0, None]
    assert [each.to_next_forward_pa for each in stages] == [5.0, 22.0, 22.0, 24.0, 20.0, 10.0, None]


def test_a_direction_that_was_not_found_has_no_numbers():
    (only,) = stage_flows(shares_forward=(), shares_reverse=(0.3,), drops_forward_pa=(), drops_reverse_pa=())
    assert only.loop_share_forward is None
    assert only.loop_share_reverse == 0.3
    assert stage_flows(shares_forward=(), shares_reverse=(), drops_forward_pa=(), drops_reverse_pa=()) == ()
