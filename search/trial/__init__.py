"""What is to be planned, under which rules, on which ground?"""
