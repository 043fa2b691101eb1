package runner

import (
	"crypto/hmac"
	"crypto/rand"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"time"
)

// message is what of a message of Jupyter's wire protocol matters here.
type message struct {
	typ, id, parent string
	content         json.RawMessage
}

type header struct {
	ID       string `json:"msg_id"`
	Session  string `json:"session"`
	Username string `json:"username"`
	Date     string `json:"date"`
	Type     string `json:"msg_type"`
	Version  string `json:"version"`
}

const delimiter = "<IDS|MSG>"

// newID gives a random identifier.
func newID() string {
	var b [16]byte
	// crypto/rand.Read never fails.
	_, _ = rand.Read(b[:])
	return hex.EncodeToString(b[:])
}

// frames makes the frames of a request, signed with key.
func frames(key []byte, session, id, typ string, content any) ([][]byte, error) {
	h, err := json.Marshal(header{ID: id, Session: session, Username: "thinward",
		Date: time.Now().UTC().Format(time.RFC3339Nano), Type: typ, Version: "5.3"})
	if err != nil {
		return nil, err
	}
	c, err := json.Marshal(content)
	if err != nil {
		return nil, err
	}
	body := [][]byte{h, []byte("{}"), []byte("{}"), c}
	return append([][]byte{[]byte(delimiter), sign(key, body)}, body...), nil
}

func sign(key []byte, body [][]byte) []byte {
	mac := hmac.New(sha256.New, key)
	for _, part := range body {
		mac.Write(part)
	}
	return []byte(hex.EncodeToString(mac.Sum(nil)))
}

var (
	errFrames    = errors.New("a message of the kernel is incomplete")
	errSignature = errors.New("a message has a wrong signature")
)

// parseFrames reads a message and checks its signature.
func parseFrames(key []byte, parts [][]byte) (message, error) {
	var m message
	at := 0
	for at < len(parts) && string(parts[at]) != delimiter {
		at++
	}
	if len(parts) < at+6 {
		return m, errFrames
	}
	body := parts[at+2 : at+6]
	if !hmac.Equal(sign(key, body), parts[at+1]) {
		return m, errSignature
	}
	var h, p header
	if err := json.Unmarshal(body[0], &h); err != nil {
		return m, err
	}
	// A parent may be an empty object.
	if err := json.Unmarshal(body[1], &p); err != nil {
		return m, err
	}
	return message{typ: h.Type, id: h.ID, parent: p.ID, content: body[3]}, nil
}
