"""Which standards to prepare: the design, its weighings, and what may be expected of it."""
