"""Thermal conductivity of the lattice: one file a model, one interface."""
