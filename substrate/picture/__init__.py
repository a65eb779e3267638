"""FROM results file TO figures and report."""
