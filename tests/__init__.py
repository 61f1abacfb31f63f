"""The checks of the project; ``python -m tests`` runs them all."""
