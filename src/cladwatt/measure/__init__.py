"""The straightened pipe: from a frame and a region to bands of temperature along it."""
