"""Whether a rewritten diagram still is one: the first of the driver's three checks."""

from __future__ import annotations

from itertools import groupby

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Adder, Delay, Element, Signal, expressions_of, signals_read
from flowgraph.diagram.expression import names_in
from flowgraph.diagram.index import index, instant_order
from flowgraph.passes.wording import counted


def faults_of_rewriting(before: Diagram, after: Diagram) -> list[str]:
    """What is wrong with the diagram after a pass, one sentence each; empty when nothing is."""
    faults: list[str] = []
    if before.inputs() != after.inputs() or list(before.outputs) != list(after.outputs):
        faults.append("the ports changed")
    if before.coefficients != after.coefficients or before.claims != after.claims:
        faults.append("coefficients or claims changed")
    for name, element in after.elements.items():
        if name != element.name:
            faults.append(f"{element.name} stands under the name {name}")
        faults.extend(_element_faults(after, element))
    for output in after.outputs.values():
        faults.extend(_signal_faults(after, output.name, output.signal))
    if not faults:
        view = index(after)
        _, loops = instant_order(view)
        faults.extend("a loop without a delay: " + ", ".join(view.names[at] for at in loop) for loop in loops)
    return sorted(faults)


def _element_faults(diagram: Diagram, element: Element) -> list[str]:
    faults = [fault for signal in signals_read(element) for fault in _signal_faults(diagram, element.name, signal)]
    if isinstance(element, Adder):
        read = signals_read(element)
        if len(read) < 2 or len(set(read)) < len(read):
            faults.append(f"the adder {element.name} has one input, or one signal twice")
    if isinstance(element, Delay) and (element.length < 1 or len(element.starts) not in (0, element.length)):
        cells = counted(element.length, "cell")
        faults.append(f"the delay {element.name} has {counted(len(element.starts), 'content')} for {cells}")
    unknown = {
        name for used, _ in groupby(expressions_of(element)) for name in names_in(used)
    } - diagram.coefficients.keys()
    faults.extend(f"{element.name} reads the coefficient {name}, which is not there" for name in sorted(unknown))
    return faults


def _signal_faults(diagram: Diagram, reader: str, signal: Signal) -> list[str]:
    source = diagram.elements.get(signal.name)
    if source is None:
        return [f"{reader} reads {signal.name}, which is not there"]
    if isinstance(source, Delay):
        return [] if 1 <= signal.tap <= source.length else [f"{reader} reads cell {signal.tap} of {signal.name}"]
    return [] if signal.tap == 0 else [f"{reader} reads a cell of {signal.name}, which is no delay"]
