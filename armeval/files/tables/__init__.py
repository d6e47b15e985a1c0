"""Text tables: dialect, columns, rows, and what is wrong in them."""
