"""Outside figures, and how to read them."""
