"""Regression methods: partial least squares and band area."""
