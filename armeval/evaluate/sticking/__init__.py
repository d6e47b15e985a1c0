"""Rests of a joint: found in laps, merged into regions, explained, and what would help."""
