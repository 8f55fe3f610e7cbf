"""The validator: does the total stay finite, and does it agree with what is known from elsewhere?"""
