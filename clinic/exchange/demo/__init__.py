"""An invented clinic for trying Ebbline out: everybody and everything in it is made up.

``model`` draws one eye's fluid, sight and pressure; ``policy`` says what the invented clinicians
do; ``course`` lets a person come and go; ``cast`` says who there is; ``stories`` puts in the cases
worth seeing; ``generate`` returns the rows; ``load`` stores them.
"""
