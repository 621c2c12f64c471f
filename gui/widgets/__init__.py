"""Parts that many views are built of: forms, panels, tables, the colour bar."""
