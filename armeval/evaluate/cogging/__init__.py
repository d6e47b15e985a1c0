"""Cog maps: from measured angles to orders, and what a compensation table leaves of them."""
