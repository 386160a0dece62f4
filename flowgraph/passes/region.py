"""The proof of a step that rearranges elements: each region it changed is compared as a diagram.

The signals a region reads from outside are its inputs, the changed signals that leave it its outputs.
If every region computes its outputs from its inputs as before, so does the whole: the signals between
the regions then solve the same equations, and these have one solution, since neither diagram has a
loop without a delay.
"""

from __future__ import annotations

from flowgraph.diagram.diagram import Diagram
from flowgraph.diagram.elements import Delay, Element, Input, Output, Signal, redirected, signals_read
from flowgraph.passes.proof import NotProved, Proof
from flowgraph.passes.wording import counted


def prove_regions(before: Diagram, after: Diagram, regions: tuple[frozenset[str], ...]) -> Proof:
    """The proof that each region kept its outputs, starting contents included. Raises NotProved."""
    from flowgraph.algebra.compare import compare

    homes: dict[str, list[int]] = {}
    for at, region in enumerate(regions):
        for name in sorted(region):
            homes.setdefault(name, []).append(at)
    _check_cover(before, after, homes)
    leaving = _leaving(before, after, homes, len(regions))
    errors: list[int] = []
    for region, signals in zip(regions, leaving, strict=True):
        comparison = compare(*_region_diagrams(before, after, region, signals))
        if not comparison.equal:
            raise NotProved(f"the outputs of the region {', '.join(sorted(region))} changed")
        if comparison.method != "exact":
            errors.append(comparison.error_below)
    if not errors:
        return Proof("exact", 0, False)
    return Proof("identity test", min(errors) - (len(errors) - 1).bit_length(), False)


def _check_cover(before: Diagram, after: Diagram, homes: dict[str, list[int]]) -> None:
    """Every changed element must stand in one region; a port may show nothing new."""
    for diagram in (before, after):
        for name in diagram.elements:
            if before.elements.get(name) != after.elements.get(name) and len(homes.get(name, ())) != 1:
                raise NotProved(f"{name} changed and stands in {counted(len(homes.get(name, ())), 'region')}")
    for name, output in before.outputs.items():
        if after.outputs[name].signal != output.signal:
            raise NotProved(f"the port {name} shows another signal")


def _leaving(before: Diagram, after: Diagram, homes: dict[str, list[int]], count: int) -> list[dict[Signal, None]]:
    """For each region the signals that ports or elements outside it read, before or after."""
    leaving: list[dict[Signal, None]] = [{} for _ in range(count)]
    for diagram in (before, after):
        for element in diagram.elements.values():
            own = homes.get(element.name, ())
            for signal in signals_read(element):
                for at in homes.get(signal.name, ()):
                    if at not in own:
                        leaving[at][signal] = None
        for output in diagram.outputs.values():
            for at in homes.get(output.signal.name, ()):
                leaving[at][output.signal] = None
    return leaving


def _region_diagrams(
    before: Diagram, after: Diagram, region: frozenset[str], leaving: dict[Signal, None]
) -> tuple[Diagram, Diagram]:
    """The region before and after, with the same ports: what it reads from outside, and what leaves it."""
    sides = [
        [diagram.elements[name] for name in sorted(region) if name in diagram.elements] for diagram in (before, after)
    ]
    read = {signal: None for side in sides for element in side for signal in signals_read(element)}
    entering = {signal: Signal(_written(signal)) for signal in read if signal.name not in region}
    pair: list[Diagram] = []
    for diagram, side in zip((before, after), sides, strict=True):
        for signal in leaving:
            if not _shows(diagram, signal):
                raise NotProved(f"{signal.name} is read outside its region and is gone")
        elements: dict[str, Element] = {port.name: Input(port.name) for port in entering.values()}
        elements.update((element.name, redirected(element, entering)) for element in side)
        outputs = {_written(signal): Output(_written(signal), signal) for signal in leaving}
        pair.append(Diagram(diagram.name, elements, outputs, diagram.coefficients))
    return pair[0], pair[1]


def _shows(diagram: Diagram, signal: Signal) -> bool:
    element = diagram.elements.get(signal.name)
    length = element.length if isinstance(element, Delay) else 0
    return element is not None and signal.tap <= length and (signal.tap > 0) == (length > 0)


def _written(signal: Signal) -> str:
    """A name no element has, since names hold no blank."""
    return f"{signal.name} after {signal.tap}"
