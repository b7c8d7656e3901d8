"""Which conditions must a balanced design meet?"""
