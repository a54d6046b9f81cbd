"""Pictures of the channel: the large drawing, the small ones, and the painters they share."""
