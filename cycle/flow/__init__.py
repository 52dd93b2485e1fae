"""Laws of one-dimensional compressible flow: no engine in them."""
