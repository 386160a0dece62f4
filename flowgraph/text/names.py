"""What is said about a name that has no meaning where it stands."""

from __future__ import annotations

from flowgraph.text import syntax as s
from flowgraph.text.scope import Env, Fault, Scope
from flowgraph.text.words import nearest


def undefined(scope: Scope, name: str, at: s.Reference | s.Word) -> Fault:
    """The finding for a name nothing defines, with the defined name it looks most like."""
    known = list(dict.fromkeys([*scope.kinds, *scope.defined]))
    close = nearest(name, known)
    mend = f"did you mean {close}?" if close else "define it, or correct the name"
    return scope.fault("undefined", f"{name[:80]} is not defined", at.start, at.end, mend)


def refuse_label(scope: Scope, reference: s.Reference, env: Env) -> None:
    """Raises Fault where the name is a label of the repeats around it: it only stands in brackets."""
    label = env.get(reference.name)
    if not isinstance(label, str):
        return
    family = next((name.removesuffix(f"[{label}]") for name in scope.defined if name.endswith(f"[{label}]")), "NAME")
    raise scope.fault(
        "label-alone",
        f"{reference.name} is a label of this repeat, and no signal or number",
        reference.start,
        reference.end,
        f"write the name it belongs to in front, such as {family}[{reference.name}]",
    )
