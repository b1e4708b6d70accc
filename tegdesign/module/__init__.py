"""Couple and module: electrodes, spreading, gap, circuit and thermal path of a batch of modules."""
