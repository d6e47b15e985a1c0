"""Joint logs: columns, clock, counters, doubts, repairs."""
