"""What an arm will do: replayed in time, followed slowly, many times over, and with causes taken out."""
