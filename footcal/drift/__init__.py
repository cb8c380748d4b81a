"""Drift: check sessions into a history, charts, trend, and the verdict on each foot."""
