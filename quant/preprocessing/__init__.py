"""One step, one file: the pure function first, then the class that obeys the scikit-learn contract."""
