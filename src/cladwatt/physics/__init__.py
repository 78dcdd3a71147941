"""Physics of radiation, convection and conduction: arrays in, arrays out, SI units inside."""
