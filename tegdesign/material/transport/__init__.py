"""Electronic transport from bands: integrals over energy, charge neutrality, linear response."""
