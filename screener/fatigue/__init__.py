"""Fatigue: S-N equations, mean stress, damage sums; curve parameters are handed in."""
