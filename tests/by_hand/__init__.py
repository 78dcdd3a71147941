"""A second calculation of a lagged pipe, from the recorded value to loss and resistance.

Nothing here imports the package. Air and vapour come from CoolProp, correlations from ht,
saturation from psychrolib, integrals and roots from scipy; what no library covers is written out
from print.
"""
