"""WHERE light travels: materials, the stack, plane waves in it, its guided modes."""
