"""Spectra: reading, medium, frame, velocity, coverage."""
