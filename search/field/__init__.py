"""Where does each plot go, and what does the crew carry?"""
