"""Speed as ratios in one run: `make speed`."""
