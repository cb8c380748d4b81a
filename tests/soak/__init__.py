"""Long fault runs: `make soak`."""
