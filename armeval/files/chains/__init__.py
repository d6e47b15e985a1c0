"""URDF: its text, its tree, the chain."""
