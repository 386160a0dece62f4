"""Rewriting: one pass a file, and the driver that proves each step."""
