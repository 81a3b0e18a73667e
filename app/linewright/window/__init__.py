"""The window: shows what the core computes and passes a person's acts back to it."""
