"""How good is a plan, and how good could any be?"""
