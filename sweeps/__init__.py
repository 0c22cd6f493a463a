"""Which variants are tried, what matters most among them, which are best."""
