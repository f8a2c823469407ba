"""The design note: one document from the answers about a circuit."""
