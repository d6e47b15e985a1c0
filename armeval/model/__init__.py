"""The things of the trade as frozen objects, checked once, where they are made."""
