"""The dialogs that take things in: foreign tables of constants, cells of CIF files."""
