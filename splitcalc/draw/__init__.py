"""Pictures: pure functions from results to a figure, and the canvas that redraws one quickly."""
