"""How the sample spectra are made: scenes, line lists, light, detector, files."""
