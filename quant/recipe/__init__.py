"""Strict TOML recipes, and the pipeline each describes."""
