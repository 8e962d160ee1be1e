"""Fits: chi-square, shapes, least squares, replicas, ensembles."""
