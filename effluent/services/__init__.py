"""Use cases, one module a job."""
