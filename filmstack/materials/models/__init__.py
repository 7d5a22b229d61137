"""Dispersion models and mixtures: one file a model, one line of the registry."""
