"""What a hand meets: force, ripple, what is noticed, what the arm can render."""
