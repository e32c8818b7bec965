"""Charts, each drawn from a record of `findings.charts` alone."""
