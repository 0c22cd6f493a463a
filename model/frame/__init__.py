"""What is built: an arrangement, the skeleton its variants share, and the variants themselves."""
