"""Second implementations that the tests judge the program by. Nothing here imports from `substrate`."""
