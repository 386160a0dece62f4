"""The ordered list of operations in which one sample is computed."""
