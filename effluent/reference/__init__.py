"""Published tables, shipped as reference and never as law."""
