"""Can a plan be found? Feasibility, the exchange kernel, annealing, rounds of runs."""
