"""A result and axes in, the same axes out."""
