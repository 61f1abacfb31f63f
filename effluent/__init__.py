"""A ledger for turbine-engine wash water, from the nozzle to the signed-for drum."""

__version__ = "0.1.0"
