"""How a chip is made: processes and their limits, what they do to a drawing, and what they cannot make.

``process`` holds the numbers, ``shipped`` the starting values. ``making`` leads from a channel as wanted to the one
as drawn and as made. ``channel_findings`` tells what a process finds fault with and what cures it.
"""
