"""The diagram: its elements, the expressions on its wires, its claims, and what it computes."""
