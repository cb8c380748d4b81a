"""footcal: foot force sensors of legged robots, from bench weights to contact and ground reaction force."""
