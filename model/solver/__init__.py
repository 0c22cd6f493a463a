"""How a frame deforms: one member, elimination order, many frames side by side, one frame."""
