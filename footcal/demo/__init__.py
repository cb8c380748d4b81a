"""The demonstration: invented feet, benches, walks and weeks, put through the same calls that real data take."""
