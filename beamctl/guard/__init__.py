"""The exposure guard: pure estimator, ceilings and dose."""
