"""What a frame is made of, how it is laid out, how it deforms and what that tells."""
