"""The order of play: numbers, passes, chains and labels of every step."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from wellseq.base.place import Place
from wellseq.model.expand import Expansion
from wellseq.model.plan import Body, CallNode, LanesNode, PassesNode, StepNode
from wellseq.model.reporter import Reporter
from wellseq.model.sequence import Lanes
from wellseq.model.steps.hold import Hold

HERE = Place("run.well", 1)
REST = Hold.model_validate({"for_": 1})


def body(*nodes) -> Body:
    return Body(nodes, sum(n.size for n in nodes), 1 + max((n.depth for n in nodes), default=0))


def hold(label: str = "") -> StepNode:
    return StepNode(REST, "hold", HERE, label)


def origins(items):
    """The origins of all steps, lanes flattened in the order they are written."""
    for item in items:
        if isinstance(item, Lanes):
            for lane in item.lanes:
                yield from origins(lane)
        else:
            yield item.origin


def test_passes_count_from_one_outermost_first(bench):
    items = bench.items("repeat 2 { hold for 1 s; repeat 3 { hold for 2 s } }")
    assert [item.origin.passes for item in items] == [
        (1,),
        (1, 1),
        (1, 2),
        (1, 3),
        (2,),
        (2, 1),
        (2, 2),
        (2, 3),
    ]
    assert [item.origin.number for item in items] == list(range(8))


def test_a_chain_is_the_calls_from_the_outermost_in(bench):
    items = bench.items(
        "do outer()", "procedure inner() { hold for 1 s }", "procedure outer() { do inner() }"
    )
    assert [place.line for place in items[0].origin.chain] == [11, 9]
    assert items[0].origin.place.line == 8


def test_a_label_before_a_group_is_for_every_step_without_one(bench):
    items = bench.items('"a" repeat 2 { hold for 1 s; "b" hold for 2 s }; hold for 3 s')
    assert [item.origin.label for item in items] == ["a", "b", "a", "b", ""]


def test_lanes_stay_together(bench):
    (lanes, last) = bench.items(
        '"both" alongside { lane { hold for 1 s; hold for 2 s } lane { ramp cradle over 1 s } }'
        "; hold for 3 s"
    )
    assert isinstance(lanes, Lanes)
    assert [[item.verb for item in lane] for lane in lanes.lanes] == [["hold", "hold"], ["ramp"]]
    assert (lanes.origin.step, lanes.origin.label, lanes.origin.number) == ("alongside", "both", -1)
    assert [origin.number for origin in origins([lanes, last])] == [0, 1, 2, 3]


def test_a_label_of_one_lane_is_not_before_the_steps_of_another(bench):
    require = 'require time after "there" below 5 s'
    fine = f'alongside {{ lane {{ "there" hold for 1 s; {require} }} }}; {require}'
    assert len(bench.items(fine)) == 2
    lanes = f'alongside {{ lane {{ "there" hold for 1 s }} lane {{ {require} }} }}'
    assert [name for name, _, _ in bench.refused(lanes)] == ["unknown-name"]


def test_a_step_that_could_not_be_read_is_left_out_and_keeps_its_number():
    nodes = body(hold(), StepNode(None, "ramp", HERE, "x"), hold())
    items = Expansion(Reporter()).play(nodes)
    assert [item.origin.number for item in items] == [0, 2]


BODIES = st.recursive(
    st.builds(hold, st.sampled_from(["", "a"])),
    lambda inner: st.one_of(
        st.builds(
            lambda count, nodes: PassesNode(((range(1, count + 1), body(*nodes)),), ""),
            st.integers(1, 3),
            st.lists(inner, min_size=1, max_size=3),
        ),
        st.builds(
            lambda nodes: CallNode(body(*nodes), HERE, "c"),
            st.lists(inner, min_size=1, max_size=3),
        ),
        st.builds(
            lambda lanes: LanesNode(tuple(body(*lane) for lane in lanes), HERE, ""),
            st.lists(st.lists(inner, min_size=1, max_size=2), min_size=1, max_size=3),
        ),
    ),
    max_leaves=12,
)


@given(st.lists(BODIES, max_size=4))
def test_as_many_steps_are_played_as_were_counted_numbered_without_a_gap(nodes):
    plan = body(*nodes)
    numbers = [origin.number for origin in origins(Expansion(Reporter()).play(plan))]
    assert numbers == list(range(plan.size))
