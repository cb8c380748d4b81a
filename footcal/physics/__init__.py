"""From mass to force: local gravity, air, reference weights and their classes, each with a standard uncertainty."""
