"""After the service visit: what changed, does it matter, could it have been shown, and the least that restores it."""
