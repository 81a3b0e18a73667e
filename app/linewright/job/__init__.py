"""The job: measure and claim, from spectrum to session."""
