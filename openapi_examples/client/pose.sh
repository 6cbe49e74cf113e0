#!/bin/sh
# Asks Armspan where the tool of an arm is: pose.sh SERVER ARM JOINTS [TOOL [FRAME]]
#   pose.sh http://127.0.0.1:8017 housing-loader 25,-70,95,30,-40,15 1
# Prints x y z r1 r2 r3 and the state. Ends with 1 on a refusal (its code is printed), with 2 on no
# answer. Not a safety function; the cautions at the head of armspan_pose.st hold here too.
set -eu

server=$1 arm=$2 joints=$3 tool=${4:-} frame=${5:-}
tag=$(($(date +%s) % 1000000000))
url="$server/v1/arms/$arm/pose?format=txt&tag=$tag${tool:+&tool=$tool}${frame:+&frame=$frame}&q=$joints"
if [ "${#url}" -gt 255 ]; then
  echo "the address has ${#url} characters, more than 255" >&2
  exit 2
fi

# Cuts by position; the first character is number 1.
field() { printf '%s' "$line" | cut -c "$1" | sed 's/ *$//'; }

asked=0
while :; do
  asked=$((asked + 1))
  # The status stands in a line of its own behind the body: 000 when nobody answered.
  answer=$(curl -s --max-time 2 -w '\n%{http_code}' "$url" | tr -d '\r') || true
  status=$(printf '%s\n' "$answer" | tail -n 1)
  line=$(printf '%s\n' "$answer" | head -n 1)
  case $status in
    '' | 000 | 429 | 502 | 503 | 504) ;;
    *) [ "$(field 24-33)" = "$tag" ] && break ;;
  esac
  if [ "$asked" -ge 3 ]; then
    echo "no answer from $server (last status: ${status:-none})" >&2
    exit 2
  fi
  sleep 1
done

if [ "$(field 1)" != 1 ]; then
  echo "refused with code $(field 3-5)" >&2
  exit 1
fi
echo "$(field 49-60) $(field 62-73) $(field 75-86) $(field 88-99) $(field 101-112) $(field 114-125) $(field 154-161)"
