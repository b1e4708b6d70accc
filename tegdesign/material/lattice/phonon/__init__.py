"""Mechanisms that scatter phonons: one file each; a branch adds their rates at every frequency."""
