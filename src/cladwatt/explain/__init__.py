"""One number of a region step by step, from the recorded value to the resistance."""
