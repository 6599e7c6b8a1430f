"""Spectra with their axis and notes, reference values, and the samples that pair them."""
