"""Rows of observables: what a measured number is made of, from couplings to matrices."""
