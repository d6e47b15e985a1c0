"""From a path to targets, and from a point back to its place on the path."""
