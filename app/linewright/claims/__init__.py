"""Claims: velocity, candidates, mixture, origins, roll call."""
