"""What restores a calibration: one remedy, one function; each fitted to standards, judged on those it had not seen."""
