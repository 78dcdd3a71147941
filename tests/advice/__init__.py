"""Whether advised measurements narrow the loss as promised, counted on drawn surveys."""
