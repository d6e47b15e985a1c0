"""From laps to figures: alignment, errors along the path, intervals, the standard's criteria."""
