"""Instant estimate: ducts, local losses and the chain of stages."""
