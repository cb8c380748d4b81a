"""Simulated sensors, benches and gaits for demo and tests; physics that shares nothing with what it tests."""
