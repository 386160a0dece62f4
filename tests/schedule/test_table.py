"""The schedule as people read it."""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Gain, Input, Output, Signal, Term
from flowgraph.diagram.expression import ONE, Name, Negative, Sum
from flowgraph.schedule.schedule import schedule
from flowgraph.schedule.table import schedule_table


def test_the_table_shows_equations_then_cells_then_counts() -> None:
    """Coefficients as written, sums in brackets, long lines by their taps, a sign stays with its term."""
    half = Name("half_of_the_weight")
    rest = Sum((ONE, Negative(half)))
    made = Diagram(
        "gauge",
        {
            "level": Input("level"),
            "past": Delay("past", Signal("level"), 3),
            "mean1": Delay("mean1", Signal("mean")),
            "mean": Adder(
                "mean",
                (
                    Term(Signal("past", 3), True, rest),
                    Term(Signal("level"), False, half),
                    Term(Signal("mean1", 1), True),
                    Term(Signal("past", 1)),
                ),
            ),
            "low.g": Gain("low.g", half, Signal("mean")),
            "d1": Delay("d1", Signal("d2", 1)),
            "d2": Delay("d2", Signal("d1", 1)),
        },
        {"mean": Output("mean", Signal("mean")), "late": Output("late", Signal("past", 2))},
    )
    assert schedule_table(made, schedule(made)).splitlines() == [
        "gauge: the operations of one sample",
        "   1  input   level",
        "   2  adder   mean = -(1 - half_of_the_weight)*past[3]",
        "                  + half_of_the_weight*level - mean1 + past[1]",
        "   3  gain    low.g = half_of_the_weight*mean",
        "   4  output  mean",
        "   5  output  late = past[2]",
        "then the cells, none read after it was overwritten",
        "   6  keep    d1.next = d2",
        "   7  update  past[1] = level, 3 cells moved on",
        "   8  update  mean1 = mean",
        "   9  update  d2 = d1",
        "  10  update  d1 = d1.next",
        "3 multiplies, 3 adds, 6 cells",
    ]
