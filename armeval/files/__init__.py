"""From a file to a validated object, and back."""
