"""Reusable parts of the window: cards, charts, tables and fields; none of them knows a session."""
