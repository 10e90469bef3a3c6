"""Theory: rates without replications, one file a kind of argument."""
