"""How a chip is made: processes and their limits, what they do to a drawing, and what they cannot make."""
