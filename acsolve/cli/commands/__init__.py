"""One module for each command; its `command` is loaded when it is named."""
