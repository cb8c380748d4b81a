"""Accuracy on fresh seeds: `make score`."""
