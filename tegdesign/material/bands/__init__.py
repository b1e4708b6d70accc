"""Materials given by their bands and their lattice: typed file, preparation for the solver, variants by doping."""
