"""The desktop app; the only home of Qt."""
