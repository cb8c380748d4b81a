"""The inverse sensor model, raw reading to newtons: one file a law, and the streaming compensator built from them."""
