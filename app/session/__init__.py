"""The open cells and choices as plain data, how they change, and what follows from them. No Qt."""
