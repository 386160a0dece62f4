"""Diagrams run on recorded signals."""
