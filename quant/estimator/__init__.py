"""The contract of steps and regressions, and what they take."""
