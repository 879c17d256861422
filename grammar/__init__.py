"""The description language: text into descriptions, descriptions into text. It knows no physics and no circuits."""
