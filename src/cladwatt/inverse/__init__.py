"""The inverse problem: from strips to losses, resistances, stretches, probabilities, verdicts."""
