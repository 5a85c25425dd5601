# First words of xoshiro128** from the state 1, 2, 3, 4, for test/math/random.test.ts.
# The steps of Blackman & Vigna 2021 (ACM TOMS 47), figure for xoshiro128**, in Python 3 whole numbers:
# python3 xoshiro.py > xoshiro.json
import json

MASK = 0xFFFFFFFF


def rotated(x, k):
    return ((x << k) | (x >> (32 - k))) & MASK


s = [1, 2, 3, 4]
words = []
for _ in range(40):
    words.append(rotated((s[1] * 5) & MASK, 7) * 9 & MASK)
    t = (s[1] << 9) & MASK
    s[2] ^= s[0]
    s[3] ^= s[1]
    s[1] ^= s[2]
    s[0] ^= s[3]
    s[2] ^= t
    s[3] = rotated(s[3], 11)
print(json.dumps({"made_by": "xoshiro.py", "state": [1, 2, 3, 4], "words": words}))
