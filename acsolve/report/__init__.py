"""Answers made readable: text, JSON, tables, pictures and saved files."""
