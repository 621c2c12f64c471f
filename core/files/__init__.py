"""Reading and writing files; text in, frozen values out."""
