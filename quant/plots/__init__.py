"""The only folder that knows matplotlib: a result goes in, axes come back."""
