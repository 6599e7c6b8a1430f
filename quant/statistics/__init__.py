"""Pure functions on arrays: figures of merit, factor rules, straight lines, intervals, splits."""
