"""From text to circuit and back: the grammar, the syntax tree, the errors of the format."""
