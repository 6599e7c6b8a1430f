"""What is known beforehand: characteristic bands, oscillators, residual-solvent limits, film positions, atmosphere."""
