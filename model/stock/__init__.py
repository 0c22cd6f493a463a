"""What can be bought: materials, sections and stock lists."""
