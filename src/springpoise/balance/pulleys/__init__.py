"""What a pulley of finite radius costs, and what each remedy gives."""
