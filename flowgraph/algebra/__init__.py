"""Exact algebra: coefficients, transfer matrices, modes and stability, and when two diagrams are equal."""
