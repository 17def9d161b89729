"""Searching two-directional networks: exactly by SAT, and by windows from good starts."""
