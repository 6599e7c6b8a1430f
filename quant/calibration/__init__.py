"""Cross-validation, choice of factors, calibration and validation."""
