"""footcal."""
