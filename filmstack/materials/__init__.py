"""N(lambda) of every medium: tables, dispersion models, mixtures, and the shipped library."""
