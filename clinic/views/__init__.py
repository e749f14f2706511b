"""One module per screen: get the thing for this user, bind the form, call one service, redirect."""
