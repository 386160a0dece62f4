"""Claims and their verdicts: proved, refuted with a witness, or undecided with the reason."""
