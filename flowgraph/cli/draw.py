"""`flowgraph draw`: a diagram as texts draw it, as SVG or PNG."""

from __future__ import annotations

import argparse
import json
import sys
from pathlib import Path

from flowgraph.cli.files import add_file_arguments, chosen_diagrams, refuse
from flowgraph.diagram.diagram import Diagram
from flowgraph.draw.picture import Picture

HELP = "SVG or PNG; --reduced shows before and after on one page"
FORMATS = ("svg", "png")


def configure(parser: argparse.ArgumentParser) -> None:
    """The options of this command."""
    add_file_arguments(parser)
    parser.add_argument(
        "-o",
        "--output",
        metavar="PICTURE",
        help="the file to write, .svg or .png; without it NAME.svg in the current folder for each diagram NAME",
    )
    parser.add_argument(
        "--reduced", action="store_true", help="before and after `reduce` on one page, merged cells marked"
    )


def execute(options: argparse.Namespace) -> int:
    """Draws each diagram into a file of its own and prints the names of the files."""
    form = _format(options.output)
    diagrams = chosen_diagrams(options, "claims" if options.reduced else "loops")
    if options.output is not None and len(diagrams) > 1:
        names = ", ".join(diagram.name for diagram in diagrams)
        refuse(f"-o takes one diagram and there are {len(diagrams)}: name one as FILE:NAME ({names}), or leave out -o")
    twice = [diagram.name for at, diagram in enumerate(diagrams) if diagram.name in {d.name for d in diagrams[:at]}]
    if twice:
        refuse(f"several diagrams are called {twice[0]}, and each is drawn into a file of its name: use -o, one by one")
    drawn = [(diagram, _picture(diagram, options.reduced)) for diagram in diagrams]
    told = []
    for diagram, picture in drawn:
        path = options.output or f"{diagram.name}{'-reduced' if options.reduced else ''}.{form}"
        _write(path, picture, form)
        told.append(_told(diagram, picture, path, form))
    if options.json:
        print(json.dumps({"drawings": told}, indent=2, ensure_ascii=False))
        return 0
    for (_, picture), entry in zip(drawn, told, strict=True):
        print(entry["file"])
        if picture.connectors:
            print(f"note: drawn as named connectors: {', '.join(picture.connectors)}", file=sys.stderr)
    return 0


def _format(output: str | None) -> str:
    """The format by the ending of the file's name."""
    if output is None:
        return FORMATS[0]
    ending = Path(output).suffix.lower().lstrip(".")
    if ending not in FORMATS:
        known = " and ".join(f".{known}" for known in FORMATS)
        refuse(
            f"{output}: drawings are written as {known}, and the name ends in {'.' + ending if ending else 'neither'}"
        )
    return ending


def _picture(diagram: Diagram, reduced: bool) -> Picture:
    from flowgraph.draw.draw import TooLarge
    from flowgraph.draw.page import draw_before_after, draw_page

    try:
        if not reduced:
            return draw_page(diagram)
        from flowgraph.algebra.rational_functions import Undefined
        from flowgraph.passes.reduce import BrokenPassError, reduce_diagram

        try:
            reduction = reduce_diagram(diagram)
        except (BrokenPassError, Undefined) as error:
            refuse(f"{diagram.name} cannot be reduced: {error}")
        merged = {(old.name, old.tap): (new.name, new.tap) for old, new in reduction.merged().items()}
        return draw_before_after(diagram, reduction.after, merged)
    except TooLarge as reason:
        refuse(str(reason))


def _write(path: str, picture: Picture, form: str) -> None:
    from flowgraph.draw.dot import PenMissing, ink
    from flowgraph.draw.svg import as_svg
    from flowgraph.source.whole_file import whole_file

    try:
        drawing = as_svg(picture) if form == "svg" else ink(picture, form)
    except PenMissing as reason:
        refuse(str(reason))
    try:
        with whole_file(path) as place:
            place.write_bytes(drawing)
    except OSError as error:
        refuse(f"{path}: {error.strerror or error}")


def _told(diagram: Diagram, picture: Picture, path: str, form: str) -> dict[str, object]:
    left, top, right, bottom = picture.bounds()
    return {
        "name": diagram.name,
        "file": path,
        "format": form,
        "width": round(right - left, 2),
        "height": round(bottom - top, 2),
        "symbols": len(picture.shapes),
        "connectors": list(picture.connectors),
        "description": picture.description,
    }
