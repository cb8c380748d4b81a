"""What a bench session shall do, and when it counts as good: recipes in TOML, checked into frozen records."""
