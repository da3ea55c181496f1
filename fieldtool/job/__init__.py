"""What people entered: the models of one visit, and the changes made to them."""
