"""Many candidate recipes, honestly compared."""
