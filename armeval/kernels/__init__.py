"""Compiled loops: arrays in, arrays out, no objects, no files."""
