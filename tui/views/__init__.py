"""Views: pure functions from a session and a size to lines of styled text. Each fits any size it is given."""
