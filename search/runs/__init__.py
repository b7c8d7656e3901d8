"""How is a plan made, kept, made again, and compared with others?"""
