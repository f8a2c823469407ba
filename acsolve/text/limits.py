"""Every size limit of the text format, in one place.

A text that passes one of these is refused with the limit named, before memory is spent.
"""

FILE_BYTES = 64 * 1024 * 1024
STATEMENT_TOKENS = 100_000  # signs, names and numbers in one statement
BRACKETS = 40  # brackets inside brackets
EXPRESSION_DEPTH = 200  # operations inside operations, sums and products counted term by term
LITERAL_DIGITS = 1000
EXPONENT = 400  # of a power of ten in a literal, and of a power of numbers
NUMBER_BITS = 20_000  # of a number that an expression folds to
NAME_CHARACTERS = 200  # of a name as it is written, indices included
INDEX = 10_000_000  # largest index, either sign
RANGE = 1_000_000  # indices in one range, turns of one repeat, copies of one cascade
NESTING = 32  # blocks inside blocks, and repeats inside repeats
PARTS = 1_000_000
NODES = 1_000_000
EXPANSION = 4_000_000  # statements after every block, cascade and repeat is written out
COUPLED = 200  # inductors in one set of coupled inductors
PROBLEMS = 200  # diagnostics kept; the rest are counted
SHAPES = 20_000  # statement shapes whose syntax is remembered
