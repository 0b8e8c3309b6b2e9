"""What is left of the margins when the machine is not quite as its file says, and what the law can do about it."""
