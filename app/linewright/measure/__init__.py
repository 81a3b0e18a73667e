"""Noise, pseudo-continuum, features and their profiles."""
