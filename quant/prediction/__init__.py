"""From new spectra to values with uncertainty and applicability."""
