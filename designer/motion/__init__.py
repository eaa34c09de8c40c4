"""How a jump unfolds in the build's own arithmetic; floats and arrays only."""
