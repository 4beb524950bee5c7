"""Many runs from one scenario: sweeps, limits, tolerances, unsure values, proving runs."""
