"""The engine and the service around it."""
