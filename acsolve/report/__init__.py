"""Answers for people and other programs: text, JSON, tables, files and pictures."""
