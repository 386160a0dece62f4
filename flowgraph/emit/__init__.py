"""A diagram and its schedule as program text."""
