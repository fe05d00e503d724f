"""The test day as a frozen document: nouns, pure edits, and the session.toml store."""
