"""The saved calibration: numbers and text, read back with NumPy alone."""
