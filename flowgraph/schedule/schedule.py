"""An order in which one sample can be computed, and then the cells moved on to the next sample.

Carried out literally, one operation after the other with one storage place a name, the schedule
computes what the diagram means: no signal is read before it is computed, no cell after it was
overwritten.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, NamedTuple, TypeAlias

from flowgraph.diagram.diagram import Counts, Diagram, count
from flowgraph.diagram.elements import Adder, Delay, Gain, Signal, signals_read
from flowgraph.diagram.index import strong_components

Kind: TypeAlias = Literal["input", "adder", "gain", "output", "keep", "update"]


class Operation(NamedTuple):
    """One step: what it makes, how, and the signals it reads in the order written.

    `input`, `adder` and `gain` give the element `name` its value; `output` hands a signal to the
    port `name`. `update` shifts the delay `name` by one cell and puts what it reads in front.
    `keep` copies a signal to a place of its own because its cell is overwritten too early; the
    place is called after the delay that waits for it, with `.next` behind.
    """

    name: str
    kind: Kind
    reads: tuple[Signal, ...]


@dataclass(frozen=True, slots=True)
class Schedule:
    """The operations of one sample in order: inputs, computations, outputs, then the cells."""

    operations: tuple[Operation, ...]
    counts: Counts


class DelayFreeLoopError(ValueError):
    """A diagram that no order can serve; `names` are the elements of its first delay-free loops."""

    def __init__(self, names: list[str]) -> None:
        shown = ", ".join(names[:8]) + (", .." if len(names) > 8 else "")
        super().__init__(f"no order exists: a loop without a delay runs through {shown}")
        self.names = names


def schedule(diagram: Diagram) -> Schedule:
    """The schedule of `diagram`. Ties are broken by the order of the file.

    Raises DelayFreeLoopError where wires form a loop without a delay.
    """
    inputs = [Operation(port.name, "input", ()) for port in diagram.inputs()]
    computed = _in_order(
        [
            Operation(element.name, "adder" if isinstance(element, Adder) else "gain", signals_read(element))
            for element in diagram.elements.values()
            if isinstance(element, Adder | Gain)
        ]
    )
    outputs = [Operation(name, "output", (output.signal,)) for name, output in diagram.outputs.items()]
    return Schedule((*inputs, *computed, *outputs, *_updates(diagram.delays())), count(diagram))


def _in_order(sums: list[Operation]) -> list[Operation]:
    """Adders and gains, each after those whose value it needs within the same sample.

    What is read behind a delay is in a cell already and orders nothing.
    """
    number = {operation.name: at for at, operation in enumerate(sums)}
    needs = [[number[name] for name, tap in operation.reads if not tap and name in number] for operation in sums]
    groups = strong_components(needs)
    for group in groups:
        if len(group) > 1 or group[0] in needs[group[0]]:
            raise DelayFreeLoopError([sums[at].name for at in group])
    return [sums[group[0]] for group in groups]


def _updates(delays: list[Delay]) -> list[Operation]:
    """The delays moved on so that each reads what the others held before.

    A delay goes before the one it reads. Each delay reads one signal, so this relation is a
    function and its loops share no delay: in every loop the first delay of the file has its
    next sample kept, which frees the one it reads, and goes last.
    """
    reads = {delay.name: delay.signal for delay in delays}
    waits_for = {name: signal.name for name, signal in reads.items() if signal.name in reads and signal.name != name}
    readers = dict.fromkeys(reads, 0)
    for source in waits_for.values():
        readers[source] += 1
    keeps: list[Operation] = []
    updates: dict[str, Operation] = {}

    def move_on(name: str) -> None:
        """Updates a delay that no other reads any more, and then each that only waited for the one before."""
        while readers[name] == 0:
            updates[name] = Operation(name, "update", (reads[name],))
            if name not in waits_for:
                return
            name = waits_for.pop(name)
            readers[name] -= 1

    for delay in delays:
        if readers[delay.name] == 0 and delay.name not in updates:
            move_on(delay.name)
    for delay in delays:
        if delay.name not in updates:
            kept = Operation(delay.name + ".next", "keep", (delay.signal,))
            keeps.append(kept)
            reads[delay.name] = Signal(kept.name)
            freed = waits_for.pop(delay.name)
            readers[freed] -= 1
            move_on(freed)
    return [*keeps, *updates.values()]
