"""From text to diagrams and back: reader, parser, elaboration, structural rules, printer."""
