"""Laboratory files into domain values, with every bad row named."""
