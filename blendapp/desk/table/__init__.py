"""What all tables of the desk share: how a cell looks, is typed into, refused, copied and pasted, and holds a rail."""
