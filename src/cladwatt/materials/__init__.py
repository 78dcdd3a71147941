"""Published material facts, as tables that ship with the package and that a user may extend."""
