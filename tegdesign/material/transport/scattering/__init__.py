"""Mechanisms that scatter carriers: one file each; a band adds their rates at every energy."""
