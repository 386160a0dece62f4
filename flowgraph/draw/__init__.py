"""Drawing: a diagram placed, routed and inked as signal-processing texts draw it."""
