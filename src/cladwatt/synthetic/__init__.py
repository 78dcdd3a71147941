"""Surveys with known damage, made by a richer model than the estimator uses."""
