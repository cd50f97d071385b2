"""Test sheets in hand: read from tables, interpreted, and turned into evidence."""
