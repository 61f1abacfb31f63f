"""PDF papers."""
