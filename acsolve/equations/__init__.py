"""The modified nodal equations of a circuit, assembled once and run over many fields."""
