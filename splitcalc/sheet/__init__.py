"""What the person moves: controls, and the wiring that keeps the picture with them."""
